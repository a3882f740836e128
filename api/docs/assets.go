package docs

import (
	"bytes"
	"compress/gzip"
	"embed"
	"io/fs"
	"path"
	"strings"
)

//go:embed assets
var assetFiles embed.FS

// Asset is a script, style or notice that the pages load from this server.
type Asset struct {
	Name      string // "console.js"
	MediaType string
	Squeezed  []byte // the body under gzip
}

// Body returns the asset as it is.
func (a Asset) Body() []byte {
	var out bytes.Buffer
	r, err := gzip.NewReader(bytes.NewReader(a.Squeezed))
	if err == nil {
		_, err = out.ReadFrom(r)
	}
	if err != nil {
		panic("docs: an embedded asset is damaged")
	}
	return out.Bytes()
}

var assetTypes = map[string]string{".js": "text/javascript; charset=utf-8", ".css": "text/css; charset=utf-8", ".txt": "text/plain; charset=utf-8"}

// Assets returns every asset. A large one is stored under gzip, as NAME.gz.
func Assets() []Asset {
	entries, err := fs.ReadDir(assetFiles, "assets")
	if err != nil {
		panic("docs: embedded assets cannot be listed")
	}
	all := make([]Asset, 0, len(entries))
	for _, e := range entries {
		stored, err := assetFiles.ReadFile("assets/" + e.Name())
		if err != nil {
			panic("docs: embedded asset cannot be read: " + e.Name())
		}
		a := Asset{Squeezed: stored}
		var squeezed bool
		if a.Name, squeezed = strings.CutSuffix(e.Name(), ".gz"); !squeezed {
			a.Squeezed = squeeze(stored)
		}
		a.MediaType = assetTypes[path.Ext(a.Name)]
		if a.MediaType == "" {
			panic("docs: no media type for asset " + a.Name)
		}
		all = append(all, a)
	}
	return all
}

func squeeze(body []byte) []byte {
	var out bytes.Buffer
	w := gzip.NewWriter(&out)
	if _, err := w.Write(body); err != nil {
		panic("docs: an asset cannot be compressed")
	}
	if err := w.Close(); err != nil {
		panic("docs: an asset cannot be compressed")
	}
	return out.Bytes()
}
