package render

import (
	"railproof/api/wire"
	"railproof/calc/quantity"
)

// SteadyStateText writes an answer of the steady state for reading.
func SteadyStateText(a *wire.SteadyStateAnswer) string {
	p := new(page)
	p.line(railName(a.Stage), ": steady state, ", a.Status)
	p.title(pointWords(a.Point))
	p.trouble(a.Detail, a.NearestOperable, a.Runaway)
	if a.ConductionMode != "" {
		p.line("conduction ", a.ConductionMode)
	}
	if a.Quantities != nil {
		p.b.WriteByte('\n')
		p.figures(a.Quantities.List())
	}
	if len(a.PartTemperatures) > 0 {
		p.b.WriteByte('\n')
		p.temperatures(a.PartTemperatures)
	}
	p.basis(&a.Basis)
	return p.b.String()
}

// figures writes quantities with their meanings.
func (p *page) figures(list []wire.Figure) {
	var rows [][]string
	for _, f := range list {
		info, _ := quantity.Of(f.ID)
		rows = append(rows, []string{f.ID.Key(), Figure3(f.Value, info.Unit), info.Meaning})
	}
	p.table([]align{left, right, left}, []string{"quantity", "value", "meaning"}, rows)
}
