package api

import (
	"fmt"
	"html"
	"io/fs"
	"slices"
	"strings"

	"github.com/labstack/echo/v4"

	"railproof/api/docs"
	"railproof/api/exchange"
	"railproof/openapi"
)

// docsPages answers /docs/{page}.
func docsPages() echo.HandlerFunc {
	pages := map[string]echo.HandlerFunc{}
	for _, p := range docs.Pages() {
		pages[p.Name] = page(p.Title, docs.HTML(p.Text))
	}
	return oneOf(pages, "page")
}

// problemPages answers /docs/problems/{kind}.
func problemPages() echo.HandlerFunc {
	pages := map[string]echo.HandlerFunc{}
	for _, k := range exchange.Kinds() {
		text := fmt.Sprintf("<h1>%s</h1>\n<p>Status %d, type <code>%s</code>.</p>\n<p>%s</p>\n", html.EscapeString(k.Title), k.Status, k.Kind, html.EscapeString(k.Meaning))
		pages[string(k.Kind)] = page(k.Title, text)
	}
	return oneOf(pages, "kind")
}

// example answers /examples/{rail}/{name}.
func example() echo.HandlerFunc {
	files := map[string]echo.HandlerFunc{}
	examples := openapi.Examples()
	err := fs.WalkDir(examples, ".", func(name string, d fs.DirEntry, err error) error {
		if err != nil || d.IsDir() {
			return err
		}
		text, err := fs.ReadFile(examples, name)
		files[name] = document(echo.MIMEApplicationJSON, text)
		return err
	})
	if err != nil {
		panic("api: the embedded examples cannot be read")
	}
	return oneOf(files, "rail", "name")
}

// oneOf picks the handler that the path parameters name.
func oneOf(handlers map[string]echo.HandlerFunc, parameters ...string) echo.HandlerFunc {
	return func(c echo.Context) error {
		name := c.Param(parameters[0])
		for _, p := range parameters[1:] {
			name += "/" + c.Param(p)
		}
		handler := handlers[name]
		if handler == nil {
			return echo.ErrNotFound
		}
		return handler(c)
	}
}

// overview lists the operations and the pages.
func (a *API) overview(c echo.Context) error { return page("railproof", a.index())(c) }

func (a *API) index() string {
	var b strings.Builder
	b.WriteString("<h1>railproof</h1>\n<p>Worst-case proof of step-down supply rails. The contract: <a href=\"/openapi.yaml\">openapi.yaml</a>, <a href=\"/openapi.json\">openapi.json</a>.</p>\n")
	b.WriteString("<h2>Operations</h2>\n<div class=\"table\"><table><tr><th>request</th><th>gives</th><th>forms</th></tr>\n")
	missing := a.Missing()
	for _, op := range a.contract.Operations() {
		if !slices.Contains(missing, op.ID) {
			fmt.Fprintf(&b, "<tr><td><code>%s %s</code></td><td>%s</td><td>%s</td></tr>\n", op.Method, html.EscapeString(op.Path), html.EscapeString(op.Summary), strings.Join(a.exchange.Forms(op), ", "))
		}
	}
	b.WriteString("</table></div>\n<h2>Pages</h2>\n<ul>\n")
	for _, p := range docs.Pages() {
		fmt.Fprintf(&b, "<li><a href=\"/docs/%s\">%s</a></li>\n", p.Name, html.EscapeString(p.Title))
	}
	b.WriteString("</ul>\n<h2>Problems</h2>\n<ul>\n")
	for _, k := range exchange.Kinds() {
		fmt.Fprintf(&b, "<li><a href=\"/docs/problems/%s\">%s</a>: %s</li>\n", k.Kind, k.Kind, html.EscapeString(k.Title))
	}
	fmt.Fprintf(&b, "</ul>\n<p>Contract %s.</p>\n", html.EscapeString(a.contract.Version()))
	return b.String()
}

const pageStyle = `body{font:16px/1.55 system-ui,sans-serif;color:#1c2430;background:#fbfbf9;max-width:62rem;margin:2.5rem auto;padding:0 1.5rem}
h1,h2,h3{line-height:1.25;margin-top:2rem}a{color:#0b5c6b}code,pre{font:0.9em ui-monospace,monospace}
pre{background:#eef0ec;padding:1rem;overflow-x:auto;border-radius:4px}.table{overflow-x:auto}
table{border-collapse:collapse;width:100%}th,td{text-align:left;vertical-align:top;padding:.35rem .75rem .35rem 0;border-bottom:1px solid #d9ddd4}`

// page wraps a body that is HTML already.
func page(title, body string) echo.HandlerFunc {
	text := "<!doctype html>\n<html lang=\"en\"><head><meta charset=\"utf-8\"><meta name=\"viewport\" content=\"width=device-width\"><title>" +
		html.EscapeString(title) + "</title><style>" + pageStyle + "</style></head><body>\n" + body + "</body></html>\n"
	serve := document("text/html; charset=utf-8", []byte(text))
	return func(c echo.Context) error {
		c.Response().Header().Set(echo.HeaderContentSecurityPolicy, "default-src 'none'; style-src 'unsafe-inline'; frame-ancestors 'none'")
		return serve(c)
	}
}
