package wire

import "embed"

//go:embed testdata
var testdata embed.FS
