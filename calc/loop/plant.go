package loop

import (
	"strconv"

	"railproof/calc/parts"
	"railproof/calc/stage"
	"railproof/calc/switched"
)

// Plant is everything the loop analysis needs to know: the switched circuit at
// its operating point, with the elements' values there, and the loop around it.
type Plant struct {
	Circuit     switched.Circuit
	Duty        float64                           // [1]
	Output      float64                           // [V] mean output voltage
	Mode        switched.Mode                     // conduction mode at the point
	Modes       [switched.MaxPhases]switched.Mode // that of each unequal phase, all with the same duty ratio
	Conduct     float64                           // [1] fraction of the period in which the rectifier conducts; in discontinuous conduction only
	Modulator   parts.Modulator
	Compensator parts.Compensator
	Feedback    stage.Feedback
	Source      Source
}

// Operate fills in the operating point from a solution of the plant's circuit.
func (p *Plant) Operate(s *switched.Solution) {
	p.Duty, p.Output, p.Mode, p.Conduct = s.Duty, s.OutputMean, s.Leg.Mode, s.Leg.Conduct
	for k := range p.Modes {
		p.Modes[k] = s.Legs[k].Mode
	}
}

// mode returns the conduction mode of a phase.
func (p *Plant) mode(k int) switched.Mode {
	if p.Circuit.Legs != nil {
		return p.Modes[k]
	}
	return p.Mode
}

// RampSlope returns the slope of the comparator's ramp [V/s]: VM fs in voltage
// mode, proportional to the input voltage with feed-forward; the compensating
// slope in peak current mode.
func (p *Plant) RampSlope() float64 {
	m := &p.Modulator
	if m.Mode == parts.PeakCurrentMode {
		return m.Slope
	}
	slope := m.Ramp / p.Circuit.Period
	if m.FeedForward {
		slope *= p.Circuit.Vin / m.FeedForwardAt
	}
	return slope
}

// sense returns the current sense gain [ohm], 0 in voltage mode.
func (p *Plant) sense() float64 {
	if p.Modulator.Mode == parts.PeakCurrentMode {
		return p.Modulator.Sense
	}
	return 0
}

// Check reports what makes the loop meaningless. The error is a
// *stage.InvalidError with field ids of the stage.
func (p *Plant) Check() error {
	if f := p.Faults(); len(f) > 0 {
		return &stage.InvalidError{Faults: f}
	}
	return nil
}

// Faults lists what makes the loop meaningless.
func (p *Plant) Faults() []stage.Fault {
	var f []stage.Fault
	below := func(field string, given, limit float64, detail string) {
		if !(given > limit) {
			f = append(f, stage.Fault{Field: field, Given: given, Limit: limit, Accepted: "above " + number(limit), Detail: detail})
		}
	}
	atLeast := func(field string, given, limit float64, detail string) {
		if !(given >= limit) {
			f = append(f, stage.Fault{Field: field, Given: given, Limit: limit, Accepted: "at least " + number(limit), Detail: detail})
		}
	}
	m, c := &p.Modulator, &p.Compensator
	if !m.Present {
		f = append(f, stage.Fault{Field: "modulator", Given: parts.Unknown, Limit: parts.Unknown, Accepted: "a modulator", Detail: "required for the control loop"})
	} else if m.Mode == parts.PeakCurrentMode {
		below("modulator/sense_ohm", m.Sense, 0, "current sense gain")
		atLeast("modulator/slope_v_per_s", m.Slope, 0, "slope compensation")
	} else {
		below("modulator/ramp_v", m.Ramp, 0, "a comparator without a ramp has no finite gain")
		if m.FeedForward {
			below("modulator/feed_forward_at_v", m.FeedForwardAt, 0, "input voltage at which the ramp holds")
		}
	}
	if m.Present {
		atLeast("modulator/delay_s", m.Delay, 0, "comparator and driver delay")
		most := min(p.Duty, 1/float64(max(1, p.Circuit.Phases))) * p.Circuit.Period
		if !(m.Delay < most) {
			f = append(f, stage.Fault{Field: "modulator/delay_s", Given: m.Delay, Limit: most, Accepted: "below " + number(most) + " s", Detail: "shorter than the on-time, which the comparator has to end, and than the time between two phases"})
		}
	}
	if !c.Present {
		f = append(f, stage.Fault{Field: "compensator", Given: parts.Unknown, Limit: parts.Unknown, Accepted: "a compensator", Detail: "required for the control loop"})
	} else {
		below("compensator/feedback_f", c.FeedbackF, 0, "a compensator without this capacitor has no integrator")
		if c.Type != parts.OpAmpType1 {
			atLeast("compensator/feedback_ohm", c.FeedbackOhm, 0, "feedback resistor")
			atLeast("compensator/shunt_f", c.ShuntF, 0, "shunt capacitor")
		}
		switch c.Type {
		case parts.OpAmpType3:
			below("compensator/lead_ohm", c.LeadOhm, 0, "without it the amplifier differentiates the output's switching edges")
			below("compensator/lead_f", c.LeadF, 0, "lead capacitor")
		case parts.TransconductanceType3:
			atLeast("compensator/lead_ohm", c.LeadOhm, 0, "lead resistor")
			below("compensator/lead_f", c.LeadF, 0, "lead capacitor")
		}
		if c.Type == parts.TransconductanceType2 || c.Type == parts.TransconductanceType3 {
			below("compensator/transconductance_s", c.Transconductance, 0, "a negative gain makes the feedback positive")
		} else if parts.Known(c.OpenLoopGain) {
			below("compensator/open_loop_gain_ratio", c.OpenLoopGain, 0, "a negative gain makes the feedback positive")
		}
	}
	if !p.Feedback.Present {
		f = append(f, stage.Fault{Field: "feedback", Given: parts.Unknown, Limit: parts.Unknown, Accepted: "reference and divider", Detail: "required for the control loop"})
	} else {
		below("feedback/upper_ohm", p.Feedback.Upper, 0, "the compensator's input resistor")
		below("feedback/lower_ohm", p.Feedback.Lower, 0, "lower feedback resistor")
	}
	return p.Source.check(f)
}

// leg returns what a phase has of its own.
func (p *Plant) leg(k int) *switched.Leg {
	if c := &p.Circuit; c.Legs != nil {
		return &c.Legs[k]
	}
	return &p.Circuit.Leg
}

// Nyquist returns the highest frequency at which the loop can be told from its
// alias: half the rate at which the comparators decide.
func (p *Plant) Nyquist() float64 {
	return float64(p.Circuit.Phases) / (2 * p.Circuit.Period)
}

// number writes x for a sentence.
func number(x float64) string { return strconv.FormatFloat(x, 'g', 6, 64) }
