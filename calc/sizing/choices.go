package sizing

import (
	"railproof/calc/parts"
	"railproof/calc/preferred"
)

// Choices say what the draft stage is made of. NewChoices leaves all of it open; a
// number that is Unknown, a series or kind that is zero means the default.
type Choices struct {
	InductorSeries  preferred.Series // default E6
	CapacitorSeries preferred.Series // default E6
	DividerSeries   preferred.Series // default E96
	Reference       float64          // [V] default 0.8, lower where the output is not above it
	LowerOhm        float64          // [ohm] lower divider resistor, default 10e3
	MinOnTime       float64          // [s] default 1e-7
	MinOffTime      float64          // [s] default 2e-7
	MaxDutyRatio    float64          // [1] default 0.98
	OutputKind      parts.CapacitorKind
	InputKind       parts.CapacitorKind // both default to class 2 ceramic
	SweepCount      int                 // frequencies of a sweep, default 9
}

// NewChoices returns choices that are all left open.
func NewChoices() Choices {
	return Choices{Reference: parts.Unknown, LowerOhm: parts.Unknown, MinOnTime: parts.Unknown, MinOffTime: parts.Unknown, MaxDutyRatio: parts.Unknown}
}

// defaultReference returns 0.8 V, or a lower reference that leaves the divider an
// upper resistor, which the loop needs.
func defaultReference(output float64) float64 {
	for _, v := range [...]float64{0.8, 0.6, 0.4} {
		if output >= 1.05*v {
			return v
		}
	}
	return 0.75 * output
}

// withDefaults fills in what was left open.
func (c Choices) withDefaults(output float64) Choices {
	number := func(v *float64, d float64) {
		if !parts.Known(*v) {
			*v = d
		}
	}
	series := func(v *preferred.Series, d preferred.Series) {
		if *v == 0 {
			*v = d
		}
	}
	kind := func(v *parts.CapacitorKind) {
		if *v == parts.CapacitorUnspecified {
			*v = parts.CeramicClass2
		}
	}
	series(&c.InductorSeries, preferred.E6)
	series(&c.CapacitorSeries, preferred.E6)
	series(&c.DividerSeries, preferred.E96)
	number(&c.Reference, defaultReference(output))
	number(&c.LowerOhm, 10e3)
	number(&c.MinOnTime, 1e-7)
	number(&c.MinOffTime, 2e-7)
	number(&c.MaxDutyRatio, 0.98)
	kind(&c.OutputKind)
	kind(&c.InputKind)
	if c.SweepCount < 2 {
		c.SweepCount = 9
	}
	return c
}
