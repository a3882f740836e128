package docs

import (
	"bytes"
	"embed"
	"html/template"
)

//go:embed templates
var templateFiles embed.FS

var templates = template.Must(template.New("").ParseFS(templateFiles, "templates/*.html"))

// Policy is the content policy of a page.
type Policy string

const (
	// Still is the policy of a page without scripts.
	Still Policy = "default-src 'none'; style-src 'self'; img-src data:; base-uri 'none'; form-action 'none'; frame-ancestors 'none'"
	// Live is the policy of a page whose scripts come from this server and talk to
	// nobody else. Styles may stand in the page: pictures and the contract's viewer
	// set them.
	Live Policy = "default-src 'none'; script-src 'self'; style-src 'self' 'unsafe-inline'; img-src 'self' data:; worker-src blob:; connect-src 'self'; base-uri 'none'; form-action 'none'; frame-ancestors 'none'"
)

// Sheet is one page as it is served.
type Sheet struct {
	Policy Policy
	HTML   []byte
}

// frame is what surrounds the body of every page.
type frame struct {
	Title   string
	Here    string // the entry of the bar that is this page
	Wide    bool   // the body takes the whole width
	Scripts []string
	Bar     []place
	Body    template.HTML
}

type place struct{ Path, Name string }

var bar = []place{
	{"/docs", "Overview"},
	{"/docs/console", "Try it"},
	{"/docs/contract", "Contract"},
	{"/docs/quantities", "Quantities"},
	{"/docs/rule-packs", "Rule packs"},
	{"/docs/requests", "Requests"},
	{"/docs/models", "Models"},
}

func (f frame) sheet(p Policy) Sheet {
	f.Bar = bar
	return Sheet{p, fill("page.html", f)}
}

func fill(name string, data any) []byte {
	var out bytes.Buffer
	if err := templates.ExecuteTemplate(&out, name, data); err != nil {
		panic("docs: template " + name + ": " + err.Error())
	}
	return out.Bytes()
}

func body(name string, data any) template.HTML {
	return template.HTML(fill(name, data)) //nolint:gosec // the template has escaped it
}

// Text is a page written in Markdown.
func Text(p Page) Sheet {
	return frame{Title: p.Title, Here: "/docs/" + p.Name, Body: template.HTML(HTML(p.Text))}.sheet(Still) //nolint:gosec // our own page, escaped by HTML
}
