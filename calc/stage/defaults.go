package stage

import "railproof/calc/parts"

// Assumed is a default that stands for a number that was not given.
type Assumed struct {
	Field     string
	Value     float64 // [any] in the field's unit
	Low, High float64 // [any] range over which the real value may lie
	Why       string
}

// ApplyDefaults puts the documented default in the place of every Unknown number
// that has one and needs it, and returns what it assumed, in the order of Fields.
func (s *Stage) ApplyDefaults() []Assumed { return applyDefaults(s.Fields()) }

// Complete applies the defaults and checks, as ApplyDefaults and Check do, over
// the fields that Fields returned for the stage as it is.
func (s *Stage) Complete(fields []Field) ([]Assumed, error) {
	assumed := applyDefaults(fields)
	return assumed, s.check(fields)
}

func applyDefaults(fields []Field) []Assumed {
	var a []Assumed
	for i := range fields {
		f := &fields[i]
		if f.Default != nil && !parts.Known(*f.Value) && (f.Beside == nil || parts.Known(*f.Beside)) {
			*f.Value = f.Default.Value
			a = append(a, Assumed{f.ID, f.Default.Value, f.Default.Low, f.Default.High, f.Default.Why})
		}
	}
	return a
}

// NewStage returns a stage whose every number is Unknown, with room for the
// given capacitor banks and phase overrides; a decoder fills in what it is given.
func NewStage(r Rectifier, outputBanks, inputBanks, phases int, modulator, compensator, feedback, core bool) *Stage {
	s := Outline(r, outputBanks, inputBanks, phases, modulator, compensator, feedback, core)
	for _, f := range s.Fields() {
		*f.Value = parts.Unknown
	}
	return s
}

// Outline returns a stage with room as NewStage makes it, whose numbers are still
// to be set, the ones that are not known to Unknown.
func Outline(r Rectifier, outputBanks, inputBanks, phases int, modulator, compensator, feedback, core bool) *Stage {
	s := &Stage{
		Rectifier: r, PhaseCount: 1,
		OutputCapacitors: make([]parts.Capacitor, outputBanks),
		InputCapacitors:  make([]parts.Capacitor, inputBanks),
		Phases:           make([]PhaseOverride, phases),
	}
	s.Modulator.Present, s.Compensator.Present = modulator, compensator
	s.Feedback.Present, s.Inductor.Core.Present = feedback, core
	return s
}
