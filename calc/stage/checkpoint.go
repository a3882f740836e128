package stage

import (
	"fmt"

	"railproof/calc/parts"
)

// faults collects what is wrong, so that a document's faults are told at once.
type faults []Fault

// within adds a fault unless least <= v <= greatest; NaN is a fault.
func (f *faults) within(field string, v, least, greatest float64, unit string) bool {
	switch {
	case !(v >= least):
		*f = append(*f, Fault{Field: field, Given: v, Limit: least, Accepted: fmt.Sprintf("at least %g %s", least, unit), Detail: "below what is possible"})
	case !(v <= greatest):
		*f = append(*f, Fault{Field: field, Given: v, Limit: greatest, Accepted: fmt.Sprintf("at most %g %s", greatest, unit), Detail: "above what is possible"})
	default:
		return true
	}
	return false
}

// ordered adds a fault unless Min <= Typ <= Max.
func (f *faults) ordered(field string, r Range, unit string) {
	switch {
	case !(r.Min <= r.Max):
		*f = append(*f, Fault{Field: field, Given: r.Min, Limit: r.Max, Accepted: fmt.Sprintf("a least value of at most %g %s", r.Max, unit), Detail: "the range is upside down"})
	case !(r.Min <= r.Typ && r.Typ <= r.Max):
		*f = append(*f, Fault{Field: field, Given: r.Typ, Limit: r.Min, Accepted: fmt.Sprintf("between %g and %g %s", r.Min, r.Max, unit), Detail: "the typical value lies outside its range"})
	}
}

func (f faults) err() error {
	if len(f) == 0 {
		return nil
	}
	return &InvalidError{f}
}

// Check reports what is wrong with the point for the stage. The error is an
// *InvalidError whose fields are relative to the point.
func (p *Point) Check(s *Stage) error {
	var f faults
	f.within("input_v", p.Input, 0.1, 1e4, "V")
	f.within("source_ohm", p.SourceResistance, 0, 1e3, "ohm")
	f.within("load/current_a", p.Load.Current, 0, 1e5, "A")
	f.within("load/resistance_ohm", p.Load.Conductance, 0, 1e6, "S")
	f.within("ambient_degc", p.AmbientDegC, -100, 300, "degC")
	f.within("age_ratio", p.AgeRatio, 0, 1, "")
	if parts.Known(p.PartTemperatureDegC) {
		f.within("part_temperature_degc", p.PartTemperatureDegC, -100, 500, "degC")
	}
	if p.Asked != 0 {
		f.within("asked_v", p.Asked, 1e-2, 1e4, "V")
	}
	f.control(&p.Control, s, p.Input)
	return f.err()
}

func (f *faults) control(c *Control, s *Stage, input float64) {
	switch c.Kind {
	case RegulateTo:
		if f.within("control/regulate_to_v", c.Voltage, 1e-2, 1e4, "V") && !(c.Voltage < input) {
			*f = append(*f, Fault{Field: "control/regulate_to_v", Given: c.Voltage, Limit: input, Accepted: fmt.Sprintf("below the input voltage of %g V", input), Detail: "a step-down stage delivers less than its input"})
		}
	case ByFeedback:
		if !s.Feedback.Present {
			*f = append(*f, Fault{Field: "control/regulate_by", Given: parts.Unknown, Limit: parts.Unknown, Accepted: "a stage with feedback, or regulate_to_v or duty_ratio", Detail: "the stage has no feedback divider to regulate by"})
		} else if v := s.Feedback.OutputVoltage(); !(v < input) {
			*f = append(*f, Fault{Field: "control/regulate_by", Given: v, Limit: input, Accepted: fmt.Sprintf("a divider that sets less than the input voltage of %g V", input), Detail: "a step-down stage delivers less than its input"})
		}
	case FixedDuty:
		f.within("control/duty_ratio", c.Duty, 0, 1, "")
	}
}

// Check reports what is wrong with the conditions for the stage. The error is an
// *InvalidError whose fields are relative to the conditions.
func (c *Conditions) Check(s *Stage) error {
	var f faults
	f.within("input_v", c.Input.Min, 0.1, 1e4, "V")
	f.within("load/current_a", c.LoadCurrent.Min, 0, 1e5, "A")
	f.within("load/resistance_ohm", c.LoadConductance.Min, 0, 1e6, "S")
	f.within("ambient_degc", c.AmbientDegC.Min, -100, 300, "degC")
	f.within("age_ratio", c.AgeRatio.Min, 0, 1, "")
	f.within("source_ohm", c.SourceResistance, 0, 1e3, "ohm")
	f.ordered("input_v", c.Input, "V")
	f.ordered("load/current_a", c.LoadCurrent, "A")
	f.ordered("load/resistance_ohm", c.LoadConductance, "S")
	f.ordered("ambient_degc", c.AmbientDegC, "degC")
	f.ordered("age_ratio", c.AgeRatio, "")
	f.control(&c.Control, s, c.Input.Max)
	return f.err()
}

// Check reports what is wrong with the requirement. That no stage can meet it is
// not a fault but sizing's answer. The error is an *InvalidError whose fields are
// relative to the requirement.
func (r *Requirement) Check() error {
	var f faults
	f.within("input/min_v", r.Input.Min, 0.1, 1e4, "V")
	f.within("input/source_ohm", r.SourceResistance, 0, 1e3, "ohm")
	f.within("output/voltage_v", r.Output, 0.1, 1e4, "V")
	f.within("output/tolerance_ratio", r.OutputTolerance, 0, 0.5, "")
	f.within("load/min_a", r.LoadCurrent.Min, 0, 1e5, "A")
	f.within("load/max_a", r.LoadCurrent.Max, 1e-3, 1e5, "A")
	f.within("ambient/min_degc", r.AmbientDegC.Min, -100, 300, "degC")
	f.within("switching_frequency_hz", r.SwitchingFrequency.Min, 1e3, 1e8, "Hz")
	f.ordered("input", r.Input, "V")
	f.ordered("load", r.LoadCurrent, "A")
	f.ordered("ambient", r.AmbientDegC, "degC")
	f.ordered("switching_frequency_hz", r.SwitchingFrequency, "Hz")
	f.within("phase_count", float64(r.PhaseCount), 1, MaxPhases, "phases")
	return f.err()
}
