package packs

import (
	"embed"
	"sync"
)

//go:embed builtin/*.yaml
var builtinFiles embed.FS

// Builtin returns the packs that come with the service, loaded on first use.
var Builtin = sync.OnceValue(func() *Library {
	entries, err := builtinFiles.ReadDir("builtin")
	if err != nil {
		panic("packs: " + err.Error())
	}
	library := &Library{}
	for _, entry := range entries {
		raw, err := builtinFiles.ReadFile("builtin/" + entry.Name())
		if err != nil {
			panic("packs: " + err.Error())
		}
		parsed, err := Parse(raw)
		if err == nil {
			library, err = library.With(parsed)
		}
		if err != nil {
			panic("packs: " + entry.Name() + ": " + err.Error())
		}
	}
	return library
})
