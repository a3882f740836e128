package api

import (
	"fmt"
	"io/fs"
	"path"
	"slices"
	"strings"
	"sync"

	"github.com/labstack/echo/v4"

	"railproof/api/docs"
	"railproof/api/wire"
	"railproof/openapi"
	"railproof/service/packs"
)

// sheet serves a page for people under its own content policy.
func sheet(s docs.Sheet) echo.HandlerFunc {
	serve := document("text/html; charset=utf-8", s.HTML)
	return func(c echo.Context) error {
		c.Response().Header().Set(echo.HeaderContentSecurityPolicy, string(s.Policy))
		return serve(c)
	}
}

// overview lists the operations and the pages. Which operations there are is known
// when all routes are bound, so it is written on first use.
func (a *API) overview() echo.HandlerFunc {
	serve := sync.OnceValue(func() echo.HandlerFunc {
		return sheet(docs.Overview(a.contract.Version(), a.shownOperations(), a.problems()))
	})
	return func(c echo.Context) error { return serve()(c) }
}

// docsPages answers /docs/{page}.
func (a *API) docsPages() echo.HandlerFunc {
	pages := map[string]func() docs.Sheet{
		"contract":   docs.Contract,
		"console":    func() docs.Sheet { return docs.Console(a.shownOperations(), rails()) },
		"quantities": func() docs.Sheet { return docs.Quantities(quantities()) },
		"rule-packs": func() docs.Sheet { return docs.RulePacks(shownPacks(packs.Builtin().All())) },
	}
	for _, p := range docs.Pages() {
		pages[p.Name] = func() docs.Sheet { return docs.Text(p) }
	}
	handlers := map[string]echo.HandlerFunc{}
	for name, write := range pages {
		serve := sync.OnceValue(func() echo.HandlerFunc { return sheet(write()) })
		handlers[name] = func(c echo.Context) error { return serve()(c) }
	}
	return oneOf(handlers, "page")
}

// problemPages answers /docs/problems/{kind}. The pages are written on first use.
func (a *API) problemPages() echo.HandlerFunc {
	pages := sync.OnceValue(func() echo.HandlerFunc {
		handlers := map[string]echo.HandlerFunc{}
		for _, p := range a.problems() {
			handlers[p.Kind] = sheet(docs.ProblemSheet(p))
		}
		return oneOf(handlers, "kind")
	})
	return func(c echo.Context) error { return pages()(c) }
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

// rails are those that have examples.
func rails() []string {
	entries, err := fs.ReadDir(openapi.Examples(), ".")
	if err != nil {
		panic("api: the embedded examples cannot be listed")
	}
	var names []string
	for _, e := range entries {
		if e.IsDir() {
			names = append(names, e.Name())
		}
	}
	return names
}

// shownOperations tells the pages what this server answers.
func (a *API) shownOperations() []docs.Operation {
	missing := a.Missing()
	var shown []docs.Operation
	for _, op := range a.contract.Operations() {
		if slices.Contains(missing, op.ID) {
			continue
		}
		o := docs.Operation{ID: op.ID, Method: op.Method, Path: op.Path, Summary: op.Summary, Forms: a.exchange.Forms(op), Query: parameters(op.Query), InPath: parameters(op.InPath)}
		o.Body = op.Example != nil
		o.Deferred = a.jobs != nil && canDefer(op)
		_, o.Stage = op.Example["stage"]
		name := path.Base(op.Path) + ".json"
		if _, err := fs.Stat(openapi.Examples(), path.Join(rails()[0], name)); err == nil && o.Body {
			o.Example = name
		}
		shown = append(shown, o)
	}
	slices.SortStableFunc(shown, func(a, b docs.Operation) int { return group(a) - group(b) })
	return shown
}

// group puts computations first, then what else stands in the interface, then what
// serves people and machinery.
func group(o docs.Operation) int {
	switch {
	case o.Body:
		return 0
	case strings.HasPrefix(o.Path, "/v1/"):
		return 1
	}
	return 2
}

func parameters(list []openapi.Parameter) []string {
	names := make([]string, 0, len(list))
	for _, p := range list {
		names = append(names, p.Name)
	}
	return names
}

func quantities() []docs.Quantity {
	all := wire.EncodeQuantities(wire.Engine{}).Quantities
	rows := make([]docs.Quantity, 0, len(all))
	for _, q := range all {
		key := q.Key
		if q.Family != "single" {
			key += "[]"
		}
		rows = append(rows, docs.Quantity{Key: key, Symbol: q.Symbol, Unit: q.Unit, Meaning: q.Meaning, Source: q.Source, Group: q.Group})
	}
	return rows
}

// shownPacks tells the pages of rule packs.
func shownPacks(entries []packs.Entry) []docs.Pack {
	all := make([]docs.Pack, 0, len(entries))
	for _, e := range entries {
		d := e.Document
		p := docs.Pack{ID: d.ID, Title: d.Title, Edition: d.Edition, Provenance: d.Provenance, Extends: d.Extends}
		for name, v := range d.Parameters {
			p.Parameters = append(p.Parameters, docs.Parameter{Name: name, Meaning: v.Meaning, Value: v.Value, Least: v.Least, Greatest: v.Most})
		}
		slices.SortFunc(p.Parameters, func(a, b docs.Parameter) int { return strings.Compare(a.Name, b.Name) })
		for i := range d.Rules {
			r := &d.Rules[i]
			shown := docs.Rule{ID: r.ID, Title: r.Title, Severity: r.Severity, Scope: strings.Join(r.Scope, ", "), When: r.When, Value: string(r.Value), Relation: "at most", Limit: string(r.AtMost), Unit: r.Unit, Message: r.Message, Basis: r.Basis}
			if r.AtLeast != "" {
				shown.Relation, shown.Limit = "at least", string(r.AtLeast)
			}
			p.Rules = append(p.Rules, shown)
		}
		for i := range d.Overrides {
			p.Overrides = append(p.Overrides, shownOverride(&d.Overrides[i]))
		}
		all = append(all, p)
	}
	return all
}

func shownOverride(o *packs.OverrideDocument) docs.Override {
	shown := docs.Override{Target: o.Rule, Reason: o.Reason}
	if o.Parameter != "" {
		shown.Target = "parameter." + o.Parameter
	}
	var changes []string
	if o.Limit != "" {
		changes = append(changes, "limit "+string(o.Limit))
	}
	if o.Severity != "" {
		changes = append(changes, "severity "+o.Severity)
	}
	if o.Enabled != nil && !*o.Enabled {
		changes = append(changes, "off")
	}
	if o.Value != nil {
		changes = append(changes, fmt.Sprintf("value %g", *o.Value))
	}
	shown.Change = strings.Join(changes, ", ")
	return shown
}
