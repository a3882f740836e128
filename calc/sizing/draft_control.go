package sizing

import (
	"math"

	"railproof/calc/evaluate"
	"railproof/calc/loop"
	"railproof/calc/parts"
	"railproof/calc/preferred"
	"railproof/calc/stage"
)

const (
	gateOnOhm        = 2.5  // [ohm] driver and resistor, turn-on
	gateOffOhm       = 1.5  // [ohm] turn-off
	transconductance = 1e-3 // [S] of the draft's error amplifier
	amplifierOhm     = 1e7  // [ohm] its output resistance
	senseAtLimit     = 0.5  // [V] current signal at the current limit
	limitOverPeak    = 1.15 // [1] current limit over the greatest current
	slopeOverNeed    = 1.2  // [1] slope compensation over half the falling slope
	comparatorDelay  = 4e-8 // [s] of comparator and driver
)

// controller fills in the draft's controller, before parts are chosen.
func (z *sizer) controller() {
	rating := ratingAtLeast(switchRatings[:], voltageMargin*z.req.Input.Max)
	if math.IsNaN(rating) {
		rating = voltageMargin * z.req.Input.Max
	}
	z.draft.Controller = parts.Controller{
		Drive: driveFor(rating), GateOn: gateOnOhm, GateOff: gateOffOhm,
		// Slower switches of higher rating need more time to be safely off.
		DeadTime:  neat(1.5e-8 + 2.5e-10*rating),
		MinOnTime: z.choice.MinOnTime, MinOffTime: z.choice.MinOffTime, MaxDutyRatio: z.choice.MaxDutyRatio,
		// The controller takes a share of the allowed loss, between 0.2 and 2 mA.
		QuiescentCurrent: neat(math.Min(2e-3, math.Max(2e-4, 0.02*z.lossShare*z.req.Output*z.req.LoadCurrent.Max/z.req.Input.Typ))),
		DriveSupply:      parts.DriveFromInput,
		Rating:           parts.ControllerRating{Input: roundUp(voltageMargin * z.req.Input.Max), JunctionDegC: 150},
		Thermal:          parts.Thermal{JunctionToAmbient: 50},
	}
	if z.req.Input.Typ > 2*driveFor(rating)+4 {
		z.draft.Controller.DriveSupply = parts.DriveFromExternal
	}
}

// modulator fills in a peak-current-mode modulator. The current limit lies above the
// greatest current, in recovery from the load step too, and below the saturation
// rating. Slope compensation is half the falling slope at the least inductance and
// more, which is stable at every duty ratio.
//
//	Se = 1.2 · Ri (Vo + Vth)/(2 L)
//
// Source: R. B. Ridley's condition for the current loop, Se > (Sf − Sn)/2.
func (z *sizer) modulator() {
	limit := neat(limitOverPeak * math.Max(z.peakMost, z.transientPeak()))
	m := &z.draft.Modulator
	*m = parts.Modulator{
		Present: true, Mode: parts.PeakCurrentMode, Sense: neat(senseAtLimit / limit), CurrentLimit: limit,
		Delay: math.Min(comparatorDelay, z.shortestOn/4), FeedForwardAt: parts.Unknown, Ramp: parts.Unknown,
	}
	m.Slope = neat(slopeOverNeed * m.Sense * (z.voHigh + z.drops.Threshold) / (2 * z.leastL.IncrementalAt(z.peakMost)))
}

// compensator designs a transconductance amplifier with one zero and one pole on the
// exact loop at typical input and the greatest load. Where the wanted phase margin
// or crossover cannot be had, both are lowered in steps; false if none can.
func (z *sizer) compensator() bool {
	e := evaluate.Prepare(z.draft)
	var r evaluate.Result
	p := stage.Point{
		Input: z.req.Input.Typ, SourceResistance: z.req.SourceResistance, Load: stage.Load{Current: z.req.LoadCurrent.Max},
		AmbientDegC: z.req.AmbientDegC.Typ, PartTemperatureDegC: parts.Unknown, Control: stage.Control{Kind: stage.ByFeedback},
	}
	if e.Eval(&p, &r); !r.Status.Figures() {
		return false
	}
	d := z.draft
	plant := loop.Plant{Circuit: *e.Circuit(), Modulator: d.Modulator, Feedback: d.Feedback, Compensator: parts.Compensator{
		Present: true, Type: parts.TransconductanceType2, Transconductance: transconductance, OutputOhm: amplifierOhm,
		GainBandwidth: parts.Unknown, OpenLoopGain: parts.Unknown, LeadOhm: parts.Unknown, LeadF: parts.Unknown,
	}}
	plant.Operate(e.Solution())
	var s loop.Sampled
	for _, try := range loopTargets {
		design, err := s.Synthesise(&plant, loop.Target{
			Crossover: try.crossover * z.fs, PhaseMargin: try.margin, Type: parts.TransconductanceType2,
			Rounding: loop.Rounding{Resistors: preferred.E24, Capacitors: preferred.E12},
		})
		if err == nil && design.Margins.Stability == loop.Stable {
			d.Compensator = design.Compensator
			if d.Check() != nil {
				d.Compensator = parts.Compensator{} // parts that nobody can buy
				continue
			}
			z.crossover, z.phaseMargin = design.Margins.Crossover, design.Margins.PhaseMargin
			return true
		}
	}
	return false
}

// loopTargets are the crossover, over the switching frequency, and phase margin [deg]
// that the compensator is designed for, the best first. Large output banks have an
// impedance so low that the amplifier has not the gain for a high crossover.
var loopTargets = [...]struct{ crossover, margin float64 }{{crossoverRatio, 60}, {crossoverRatio, 50}, {0.07, 55}, {0.05, 50}, {0.03, 50}, {0.02, 45}, {0.01, 45}, {5e-3, 45}, {2e-3, 45}, {1e-3, 45}}
