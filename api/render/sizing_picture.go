package render

import (
	"math"
	"slices"

	"gonum.org/v1/plot/vg/draw"

	"railproof/api/wire"
)

// SweepPicture draws what the switching frequency trades: loss against inductance
// and capacitance; nil for a requirement with one frequency.
func SweepPicture(a *wire.SizingAnswer) *Picture {
	if len(a.Sweep) == 0 {
		return nil
	}
	v := newSweepView(a.Sweep)
	x := ranged("switching frequency", "Hz", v.frequency).logarithmic(4).padded(0.03)
	var list []*panel
	for _, p := range []*panel{
		v.panel(x, "loss", "W", sweepCurve{"", func(r *wire.SweepRow) *float64 { return r.Loss }}),
		v.panel(x, "inductance", "H", sweepCurve{"", func(r *wire.SweepRow) *float64 { return r.Inductance }}),
		v.panel(x, "capacitance", "F", sweepCurve{"output", func(r *wire.SweepRow) *float64 { return r.OutputCapacitance }},
			sweepCurve{"input", func(r *wire.SweepRow) *float64 { return r.InputCapacitance }}),
		v.onTime(x),
	} {
		if p != nil {
			list = append(list, p)
		}
	}
	if len(list) == 0 {
		return nil
	}
	list[0].marks[0].label = "chosen"
	last := list[len(list)-1]
	last.bareX = false
	return &Picture{
		title:       nameOr(a.Requirement.Name, "requirement") + ": sizing over switching frequency",
		subtitle:    "loss at typical input and greatest load",
		description: "Panels of loss, inductance, capacitance and on-time margin over " + countOf(len(a.Sweep), "frequency", "frequencies") + ". Chosen: " + Figure3(v.chosen, "Hz"),
		blocks:      alignPanels(list...), note: v.note(),
	}
}

// sweepView holds the rows of a sweep by frequency.
type sweepView struct {
	rows      []wire.SweepRow
	frequency []float64
	chosen    float64
}

func newSweepView(rows []wire.SweepRow) *sweepView {
	v := &sweepView{rows: rows, chosen: math.NaN()}
	for i := range rows {
		v.frequency = append(v.frequency, rows[i].Frequency)
		if rows[i].Chosen {
			v.chosen = rows[i].Frequency
		}
	}
	return v
}

type sweepCurve struct {
	name string
	of   func(*wire.SweepRow) *float64
}

// panel draws figures over frequency, those of infeasible rows as loose dots; nil
// where there are none.
func (v *sweepView) panel(x scale, name, unit string, curves ...sweepCurve) *panel {
	p := &panel{x: x, tall: px(118), bareX: true, marks: []mark{{x: v.chosen, y: math.NaN()}}}
	var lists [][]float64
	loose := false
	for i, c := range curves {
		works, fails := make([]float64, len(v.rows)), make([]float64, len(v.rows))
		for k := range v.rows {
			works[k], fails[k] = orNaN(c.of(&v.rows[k])), math.NaN()
			if v.rows[k].Status != "ok" {
				works[k], fails[k] = fails[k], works[k]
			}
		}
		lists = append(lists, works, fails)
		p.curves = append(p.curves, curve{name: c.name, x: v.frequency, y: works, style: trace(i), dots: len(v.rows) <= 40})
		if anyFinite(fails) {
			p.curves = append(p.curves, curve{x: v.frequency, y: fails, style: draw.LineStyle{Color: axisTone}, dots: true})
			loose = true
		}
	}
	p.y = ranged(name, unit, lists...)
	if !anyFinite(slices.Concat(lists...)) {
		return nil
	}
	if p.y = p.y.logarithmic(30); !p.y.log {
		p.y.least = min(p.y.least, 0)
	}
	p.y = p.y.padded(0.12)
	if loose && len(curves) == 1 {
		p.curves[len(p.curves)-1].name = "infeasible"
	}
	return p
}

// onTime draws how far the shortest on-time stays above the controller's least.
func (v *sweepView) onTime(x scale) *panel {
	p := v.panel(x, "shortest on-time over the controller's least", "", sweepCurve{"", func(r *wire.SweepRow) *float64 { return r.OnTimeMargin }})
	if p != nil {
		p.marks = append(p.marks, mark{x: math.NaN(), y: 1, label: "least", limit: true})
	}
	return p
}

func (v *sweepView) note() string {
	var at []float64
	for i := range v.rows {
		if v.rows[i].Status != "ok" {
			at = append(at, v.rows[i].Frequency)
		}
	}
	switch len(at) {
	case 0:
		return ""
	case 1:
		return "Infeasible at " + Figure3(at[0], "Hz") + "."
	}
	return "Infeasible at " + countOf(len(at), "frequency", "frequencies") + " from " + Figure3(at[0], "Hz") + " to " + Figure3(at[len(at)-1], "Hz") + "."
}

func orNaN(v *float64) float64 {
	if v == nil {
		return math.NaN()
	}
	return *v
}

func anyFinite(list []float64) bool {
	return slices.ContainsFunc(list, func(v float64) bool { return !math.IsNaN(v) && !math.IsInf(v, 0) })
}
