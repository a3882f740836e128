package render

import (
	"cmp"
	"encoding/json"
	"math"
	"slices"
	"strings"

	"railproof/api/wire"
)

// cautions lists what can hurt, of all answers: each once, with every place of the
// stage that it holds for and the severest of the points that show it there.
func (r *Report) cautions() []part {
	var items []string
	for _, h := range r.hazards() {
		items = append(items, h.words())
	}
	for _, b := range r.bases() {
		for _, w := range b.Warnings {
			if r.Sizing != nil && b == &r.Sizing.Basis && strings.HasPrefix(w.Pointer, "/stage/") {
				continue
			}
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

// hazard is a caution with the places that it holds for.
type hazard struct {
	detail string
	places []*wire.Caution
}

func (r *Report) hazards() (list []*hazard) {
	for _, b := range r.bases() {
		ofDraft := r.Sizing != nil && b == &r.Sizing.Basis
		for i := range b.Cautions {
			c := &b.Cautions[i]
			if ofDraft && strings.HasPrefix(c.Pointer, "/stage/") {
				continue // of a part that is not in this stage
			}
			k := slices.IndexFunc(list, func(h *hazard) bool { return h.detail == c.Detail })
			if k < 0 {
				k, list = len(list), append(list, &hazard{detail: c.Detail})
			}
			list[k].add(c)
		}
	}
	return list
}

// add takes a caution in, unless a severer one is known for the same place. Points
// and conditions are one place: where the stage works.
func (h *hazard) add(c *wire.Caution) {
	ofStage := func(c *wire.Caution) string {
		if strings.HasPrefix(c.Pointer, "/stage/") {
			return c.Pointer
		}
		return ""
	}
	for i, known := range h.places {
		if ofStage(known) == ofStage(c) {
			if math.Abs(orZero(c.Value)) > math.Abs(orZero(known.Value)) {
				h.places[i] = c
			}
			return
		}
	}
	h.places = append(h.places, c)
}

func (h *hazard) words() string {
	var parts []string
	common := true
	for _, c := range h.places {
		common = common && orZero(c.Limit) == orZero(h.places[0].Limit)
	}
	for _, c := range h.places {
		s := ""
		if c.Value != nil {
			s = Figure3(*c.Value, c.Unit)
		}
		if c.Limit != nil && !common {
			s += ", limit " + Figure3(*c.Limit, c.Unit)
		}
		parts = append(parts, strings.TrimSpace(s+place(c.Pointer)))
	}
	text := h.detail
	if said := strings.Join(parts, "; "); said != "" {
		text += " Here: " + said
		if c := h.places[0]; c.Limit != nil && common {
			text += "; limit " + Figure3(*c.Limit, c.Unit)
		}
		text += "."
	}
	return text
}

// assumptions lists what was not given, by the size of its effect: of the stage, and
// apart from it of the draft that sizing made from the requirement.
func (r *Report) assumptions() []part {
	var ofStage []*wire.Basis
	for _, b := range r.bases() {
		if r.Sizing == nil || b != &r.Sizing.Basis {
			ofStage = append(ofStage, b)
		}
	}
	blocks := []part{{Text: "None: every value that the answers rest on was given."}}
	if t := assumptionTable(ofStage); len(t.Rows) > 0 {
		blocks = []part{{Table: t}}
	}
	if r.Sizing != nil {
		if t := assumptionTable([]*wire.Basis{&r.Sizing.Basis}); len(t.Rows) > 0 {
			blocks = append(blocks, part{Head: "Of the draft that sizing made"}, part{Text: "These are values of a stage that was drawn from the requirement alone, not of the stage above."}, part{Table: t})
		}
	}
	return blocks
}

// assumptionTable lists what the answers rest on, each field once, the weightiest
// first.
func assumptionTable(of []*wire.Basis) *grille {
	heaviest := map[string]*wire.Assumption{}
	for _, b := range of {
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
	return t
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
