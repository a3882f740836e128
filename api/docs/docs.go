// Package docs holds the pages for people: Markdown beside this file, served
// under /docs as HTML.
package docs

import (
	"embed"
	"io/fs"
	"strings"
)

//go:embed *.md
var files embed.FS

// Page is one page for people.
type Page struct {
	Name  string // "nomenclature"
	Title string // its first heading
	Text  string // Markdown
}

// Pages returns every page, by name.
func Pages() []Page {
	entries, err := fs.ReadDir(files, ".")
	if err != nil {
		panic("docs: embedded pages cannot be listed")
	}
	var pages []Page
	for _, e := range entries {
		text, err := files.ReadFile(e.Name())
		if err != nil {
			panic("docs: embedded page cannot be read: " + e.Name())
		}
		p := Page{Name: strings.TrimSuffix(e.Name(), ".md"), Text: string(text)}
		p.Title = p.Name
		if first, _, _ := strings.Cut(p.Text, "\n"); strings.HasPrefix(first, "# ") {
			p.Title = first[2:]
		}
		pages = append(pages, p)
	}
	return pages
}
