package render

import (
	"cmp"
	"math"
	"slices"

	"railproof/api/wire"
	"railproof/calc/caution"
)

// basis writes what an answer rests on: cautions and warnings whole, assumptions
// by the size of their effect.
func (p *page) basis(b *wire.Basis) {
	if len(b.Cautions) > 0 {
		p.title("cautions")
		for i := range b.Cautions {
			if c := &b.Cautions[i]; c.Code != string(caution.EstimatesOnly) { // the notice says it
				p.wrapped("- "+c.Detail+figures(c)+place(c.Pointer), "  ")
			}
		}
	}
	if len(b.Warnings) > 0 {
		p.title("warnings")
		for _, w := range b.Warnings {
			p.wrapped("- "+w.Detail+place(w.Pointer), "  ")
		}
	}
	if len(b.Assumptions) > 0 {
		p.title("assumptions, the weightiest first")
		list := slices.Clone(b.Assumptions)
		slices.SortStableFunc(list, func(x, y wire.Assumption) int { return cmp.Compare(weight(&y), weight(&x)) })
		for i := range list {
			p.wrapped("- "+list[i].Why+place(list[i].Pointer)+moved(&list[i]), "  ")
		}
	}
	p.title("note")
	p.wrapped(b.Notice, "")
}

// figures says the numbers of a caution.
func figures(c *wire.Caution) string {
	s := ""
	if c.Value != nil {
		s += " Here: " + Figure3(*c.Value, c.Unit)
	}
	if c.Limit != nil {
		s += ", limit " + Figure3(*c.Limit, c.Unit)
	}
	return s
}

func place(pointer string) string {
	if pointer == "" {
		return ""
	}
	return " (" + pointer + ")"
}

// weight is the change that an assumption makes, relative to the quantity.
func weight(a *wire.Assumption) float64 {
	e := a.Effect
	if e == nil || e.Change == 0 {
		return 0
	}
	for _, end := range []*float64{e.AtLow, e.AtHigh} {
		if end != nil && *end != 0 {
			return e.Change / math.Abs(*end)
		}
	}
	return e.Change
}

func moved(a *wire.Assumption) string {
	if a.Effect == nil {
		return ""
	}
	if a.Effect.Change == 0 {
		return "; without effect here"
	}
	return "; moves " + a.Effect.Quantity + " by " + Figure3(a.Effect.Change, a.Effect.Unit)
}
