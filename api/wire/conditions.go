package wire

import (
	"railproof/calc/stage"
)

// Conditions are the ranges over which a stage must work.
type Conditions struct {
	Input   Range      `json:"input_v"`
	Source  *float64   `json:"source_ohm,omitzero"`
	Load    *LoadRange `json:"load,omitzero"`
	Ambient Range      `json:"ambient_degc"`
	Age     *Range     `json:"age_ratio,omitzero"`
	Control *Control   `json:"control,omitzero"`
}

// LoadRange is a load as ranges.
type LoadRange struct {
	Current    *Range `json:"current_a,omitzero"`
	Resistance *Range `json:"resistance_ohm,omitzero"`
}

// Range is a condition's range; an absent typ is the midpoint.
type Range struct {
	Min float64  `json:"min"`
	Typ *float64 `json:"typ,omitzero"`
	Max float64  `json:"max"`
}

func (r Range) decode() stage.Range {
	return stage.Range{Min: r.Min, Typ: or(r.Typ, r.Min+(r.Max-r.Min)/2), Max: r.Max}
}

func encodeRange(r *stage.Range) Range { return Range{Min: r.Min, Typ: &r.Typ, Max: r.Max} }

// Decode turns the conditions that stand at the pointer at into calc's form and
// checks them for the stage. The error is an *InvalidError.
func (w *Conditions) Decode(at string, s *stage.Stage) (stage.Conditions, error) {
	c := stage.Conditions{Input: w.Input.decode(), SourceResistance: or(w.Source, 0), AmbientDegC: w.Ambient.decode(), Control: w.Control.decode()}
	if l := w.Load; l != nil {
		if l.Current != nil {
			c.LoadCurrent = l.Current.decode()
		}
		if l.Resistance != nil {
			r := l.Resistance.decode()
			c.LoadConductance = stage.Range{Min: 1 / r.Max, Typ: 1 / r.Typ, Max: 1 / r.Min}
		}
	}
	if w.Age != nil {
		c.AgeRatio = w.Age.decode()
	}
	return c, Located(c.Check(s), at)
}

// EncodeConditions writes conditions of calc in the contract's shape.
func EncodeConditions(c *stage.Conditions) *Conditions {
	w := &Conditions{Input: encodeRange(&c.Input), Source: nonzero(c.SourceResistance), Ambient: encodeRange(&c.AmbientDegC), Control: encodeControl(&c.Control)}
	current := encodeRange(&c.LoadCurrent)
	w.Load = &LoadRange{Current: &current}
	if c.LoadConductance.Max > 0 {
		typ := 1 / c.LoadConductance.Typ
		w.Load.Resistance = &Range{Min: 1 / c.LoadConductance.Max, Typ: &typ, Max: 1 / c.LoadConductance.Min}
	}
	if c.AgeRatio != (stage.Range{}) {
		age := encodeRange(&c.AgeRatio)
		w.Age = &age
	}
	return w
}
