package wire

import (
	"math"

	"railproof/calc/parts"
	"railproof/calc/stage"
)

// Point is one operating point.
type Point struct {
	ID              string   `json:"id,omitzero"`
	Input           float64  `json:"input_v"`
	Source          *float64 `json:"source_ohm,omitzero"`
	Load            *Load    `json:"load,omitzero"`
	Ambient         float64  `json:"ambient_degc"`
	Age             *float64 `json:"age_ratio,omitzero"`
	PartTemperature *float64 `json:"part_temperature_degc,omitzero"`
	Asked           *float64 `json:"asked_v,omitzero"`
	Control         *Control `json:"control,omitzero"`
}

// Load draws a constant current and the current of a resistor.
type Load struct {
	Current    *float64 `json:"current_a,omitzero"`
	Resistance *float64 `json:"resistance_ohm,omitzero"`
}

// Control sets the duty ratio: exactly one member is given.
type Control struct {
	RegulateTo *float64 `json:"regulate_to_v,omitzero"`
	RegulateBy string   `json:"regulate_by,omitzero"`
	Duty       *float64 `json:"duty_ratio,omitzero"`
}

// Decode turns the point that stands at the pointer at into calc's form and
// checks it for the stage. The error is an *InvalidError.
func (w *Point) Decode(at string, s *stage.Stage) (stage.Point, error) {
	p := stage.Point{
		Input: w.Input, SourceResistance: or(w.Source, 0), AmbientDegC: w.Ambient, AgeRatio: or(w.Age, 0),
		PartTemperatureDegC: or(w.PartTemperature, parts.Unknown), Asked: or(w.Asked, 0), Control: w.Control.decode(),
	}
	if l := w.Load; l != nil {
		p.Load.Current = or(l.Current, 0)
		if l.Resistance != nil {
			p.Load.Conductance = 1 / *l.Resistance
		}
	}
	return p, Located(p.Check(s), at)
}

// EncodePoint writes a point of calc in the contract's shape.
func EncodePoint(p *stage.Point) *Point {
	w := &Point{Input: p.Input, Source: nonzero(p.SourceResistance), Ambient: p.AmbientDegC, Age: nonzero(p.AgeRatio), Asked: nonzero(p.Asked), Control: encodeControl(&p.Control)}
	w.Load = &Load{Current: &p.Load.Current}
	if p.Load.Conductance > 0 {
		r := 1 / p.Load.Conductance
		w.Load.Resistance = &r
	}
	if parts.Known(p.PartTemperatureDegC) {
		w.PartTemperature = &p.PartTemperatureDegC
	}
	return w
}

// decode returns the control; one that was not given is by feedback.
func (c *Control) decode() stage.Control {
	switch {
	case c == nil || c.RegulateBy != "":
		return stage.Control{Kind: stage.ByFeedback}
	case c.RegulateTo != nil:
		return stage.Control{Kind: stage.RegulateTo, Voltage: *c.RegulateTo}
	}
	return stage.Control{Kind: stage.FixedDuty, Duty: or(c.Duty, math.NaN())}
}

func encodeControl(c *stage.Control) *Control {
	switch c.Kind {
	case stage.RegulateTo:
		return &Control{RegulateTo: &c.Voltage}
	case stage.FixedDuty:
		return &Control{Duty: &c.Duty}
	}
	return &Control{RegulateBy: "feedback"}
}

// or returns the number, or what stands for one that was not given.
func or(v *float64, otherwise float64) float64 {
	if v == nil {
		return otherwise
	}
	return *v
}

// nonzero returns the number, or nil for zero, which absence means.
func nonzero(v float64) *float64 {
	if v == 0 {
		return nil
	}
	return &v
}
