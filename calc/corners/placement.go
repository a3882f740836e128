package corners

import (
	"math"
	"slices"

	"railproof/calc/evaluate"
	"railproof/calc/quantity"
	"railproof/calc/stage"
	"railproof/calc/switched"
)

// placement writes coordinates into a stage of its own and an operating point.
type placement struct {
	design  *Design
	stage   *stage.Stage
	values  []float64
	targets []*float64 // one per spread
	scaled  [][]scaled // per scale
	typical stage.Point
	point   stage.Point
}

// scaled is a number under a Scale and its typical value.
type scaled struct {
	value *float64
	typ   float64
}

func (d *Design) newPlacement(s *stage.Stage) placement {
	p := placement{design: d, stage: s, values: make([]float64, len(d.set.Variables())), scaled: make([][]scaled, len(d.scales)), typical: d.conditions.Typical()}
	fields := stage.Lookup{Fields: s.Fields()}
	value := func(field string) *float64 { return fields.Fields[fields.Find(field)].Value }
	for i := range d.set.Variables() {
		p.targets = append(p.targets, value(d.set.Variables()[i].Field))
	}
	for i := range d.scales {
		for _, field := range d.scales[i].Fields {
			f := value(field)
			p.scaled[i] = append(p.scaled[i], scaled{f, *f})
		}
	}
	return p
}

// place puts coordinates in. Numbers under a scale start from their typical value
// each time, or from what their spread has just set.
func (p *placement) place(z []float64) {
	d := p.design
	for _, list := range p.scaled {
		for i := range list {
			*list[i].value = list[i].typ
		}
	}
	d.set.Apply(z, p.values)
	for i, v := range p.values {
		*p.targets[i] = v
	}
	for k, list := range p.scaled {
		factor := d.scales[k].at(z[d.firstScale+k])
		for i := range list {
			*list[i].value *= factor
		}
	}
	p.point = p.typical
	for i := range d.ranges {
		r := &d.ranges[i]
		r.set(&p.point, r.at.At(z[r.coordinate]))
	}
}

// Model returns a model for one worker.
func (d *Design) Model() Model {
	e := evaluate.Prepare(d.stage)
	if !slices.Contains(d.quantities, quantity.ThermalFeedback) {
		e.SpareFeedback()
	}
	m := &stageModel{placement: d.newPlacement(e.Stage()), evaluator: e}
	if d.extend != nil {
		m.extend = d.extend()
	}
	return m
}

// stageModel evaluates a Design.
type stageModel struct {
	placement
	evaluator *evaluate.Evaluator
	extend    Extension
	result    evaluate.Result
}

// Eval implements Model.
func (m *stageModel) Eval(z, out []float64) (evaluate.Status, switched.Mode) {
	m.place(z)
	m.evaluator.Eval(&m.point, &m.result)
	return m.take(out)
}

// take sets out to the quantities of the result.
func (m *stageModel) take(out []float64) (evaluate.Status, switched.Mode) {
	r := &m.result
	if !r.Status.Figures() {
		for i := range out {
			out[i] = math.NaN()
		}
		return r.Status, r.Mode
	}
	if m.extend != nil {
		m.extend(m.evaluator, &m.point, r)
	}
	for i, id := range m.design.quantities {
		out[i] = r.Quantities[id]
	}
	return r.Status, r.Mode
}
