package render

import (
	"cmp"
	"encoding/json"
	"slices"

	"railproof/api/wire"
)

// cautions lists what can hurt, of all answers, each once.
func (r *Report) cautions() []part {
	var items []string
	for _, b := range r.bases() {
		for i := range b.Cautions {
			c := &b.Cautions[i]
			if s := c.Detail + figures(c) + place(c.Pointer); !slices.Contains(items, s) {
				items = append(items, s)
			}
		}
		for _, w := range b.Warnings {
			if s := w.Detail + place(w.Pointer); !slices.Contains(items, s) {
				items = append(items, s)
			}
		}
	}
	if items == nil {
		return nil
	}
	return []part{{Items: items}}
}

// assumptions lists what was not given, by the size of its effect.
func (r *Report) assumptions() []part {
	heaviest := map[string]*wire.Assumption{}
	for _, b := range r.bases() {
		for i := range b.Assumptions {
			a := &b.Assumptions[i]
			if known := heaviest[a.Pointer]; known == nil || weight(a) > weight(known) {
				heaviest[a.Pointer] = a
			}
		}
	}
	var list []*wire.Assumption
	for _, a := range heaviest {
		list = append(list, a)
	}
	slices.SortFunc(list, func(x, y *wire.Assumption) int {
		return cmp.Or(cmp.Compare(weight(y), weight(x)), cmp.Compare(x.Pointer, y.Pointer))
	})
	if list == nil {
		return []part{{Text: "None: every value that the answers rest on was given."}}
	}
	t := &grille{Head: row("tntt", "field", "value used", "why", "effect over its range")}
	for _, a := range list {
		effect := ""
		if a.Effect != nil {
			effect = "none here"
			if a.Effect.Change != 0 {
				effect = quantityName(a.Effect.Quantity) + " by " + Figure3(a.Effect.Change, a.Effect.Unit)
			}
		}
		t.Rows = append(t.Rows, row("wntt", a.Pointer, figure(a.Value, a.Unit), a.Why, effect))
	}
	return []part{{Table: t}}
}

// reproduction tells which requests gave these answers.
func (r *Report) reproduction() []part {
	t := &grille{Head: row("tt", "request", "result")}
	t.Rows = append(t.Rows, row("tw", "POST /v1/reports, as below", r.ResultID))
	for _, p := range r.Parts {
		t.Rows = append(t.Rows, row("tw", p.Method+" "+p.Path, p.ResultID))
	}
	request, err := json.Marshal(r.Request)
	if err != nil {
		panic("render: a request that was read cannot be written")
	}
	return []part{
		{Text: "The same request gives the same bytes on the engine named above. Each result's name is the SHA-256 of operation, engine and canonical request (RFC 8785); a part of this report can be had by itself from its operation, with the stage and conditions of the request below."},
		{Table: t},
		{Head: "Request"},
		{Code: string(request)},
	}
}
