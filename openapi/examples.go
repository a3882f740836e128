package openapi

import (
	"embed"
	"io/fs"
)

//go:embed examples/*/*.json
var exampleFiles embed.FS

// Examples returns the example requests: RAIL/OPERATION.json, such as
// buoy-5v0/losses.json. Parts, makers and values are invented.
func Examples() fs.FS {
	sub, err := fs.Sub(exampleFiles, "examples")
	if err != nil {
		panic("openapi: no examples")
	}
	return sub
}
