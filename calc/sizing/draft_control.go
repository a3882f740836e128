package sizing

import (
	"math"

	"railproof/calc/parts"
	"railproof/calc/preferred"
)

const (
	gateOnOhm          = 2.5  // [ohm] driver and resistor, turn-on
	gateOffOhm         = 1.5  // [ohm] turn-off
	transconductance   = 1e-3 // [S] of the draft's error amplifier
	amplifierOhm       = 1e6  // [ohm] its output resistance
	senseAtLimit       = 0.5  // [V] current signal at the current limit
	limitOverPeak      = 1.15 // [1] current limit over the greatest current
	slopeOverNeed      = 1.2  // [1] slope compensation over half the falling slope
	zeroUnderCrossover = 5.0  // [1] crossover over the compensator's zero
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
		DeadTime:  1.5e-8 + 2.5e-10*rating,
		MinOnTime: z.choice.MinOnTime, MinOffTime: z.choice.MinOffTime, MaxDutyRatio: z.choice.MaxDutyRatio,
		// The controller takes a share of the allowed loss, between 0.2 and 2 mA.
		QuiescentCurrent: math.Min(2e-3, math.Max(2e-4, 0.02*z.lossShare*z.req.Output*z.req.LoadCurrent.Max/z.req.Input.Typ)),
		DriveSupply:      parts.DriveFromInput,
		Rating:           parts.ControllerRating{Input: roundUp(voltageMargin * z.req.Input.Max), JunctionDegC: 150},
		Thermal:          parts.Thermal{JunctionToAmbient: 50},
	}
	if z.req.Input.Typ > 2*driveFor(rating)+4 {
		z.draft.Controller.DriveSupply = parts.DriveFromExternal
	}
}

// loop fills in a peak-current-mode modulator and a transconductance amplifier with
// one zero and one pole. Above the pole of load and output capacitor the plant is
// the sense gain and the impedance of the output banks, so that
//
//	|Gc(fc)| = Ri/(N |Z(fc)|),  Gc = gm k Rz above the zero,  k = Rl/(Ru + Rl)
//
// The zero lies a factor of five below the crossover, the pole at half the switching
// frequency or, if lower, where the first bank turns resistive. Slope compensation
// is half the falling slope at the least inductance and more, which is stable at
// every duty ratio.
//
// Source: R. B. Ridley's current-mode model in its low-frequency limit; usual
// placement. The loop's own analysis verifies the margins.
func (z *sizer) loop() {
	d := z.draft
	most := math.Max(z.peakMost, z.transientPeak()+z.rippleMost/2)
	limit := limitOverPeak * most
	m := &d.Modulator
	*m = parts.Modulator{Present: true, Mode: parts.PeakCurrentMode, Sense: senseAtLimit / limit, CurrentLimit: limit, FeedForwardAt: parts.Unknown, Ramp: parts.Unknown}
	saturated := z.leastL.IncrementalAt(z.peakMost)
	m.Slope = slopeOverNeed * m.Sense * (z.voHigh + z.drops.Threshold) / (2 * saturated)
	fc := crossoverRatio * z.fs
	impedance := z.outputImpedance(fc)
	k := d.Feedback.Lower / (d.Feedback.Upper + d.Feedback.Lower)
	gain := m.Sense / (z.phases * impedance)
	fz, fp := fc/zeroUnderCrossover, z.fs/2
	first := &d.OutputCapacitors[0]
	fp = math.Min(fp, math.Max(3*fc, 1/(2*math.Pi*first.ESR*first.Capacitance)))
	rz := gain / (transconductance * k)
	cz := 1 / (2 * math.Pi * fz * rz)
	d.Compensator = parts.Compensator{
		Present: true, Type: parts.TransconductanceType2, Transconductance: transconductance, OutputOhm: amplifierOhm,
		FeedbackOhm: preferred.E24.Nearest(rz), FeedbackF: preferred.E12.Nearest(cz), ShuntF: preferred.E12.Nearest(cz / (fp/fz - 1)),
		GainBandwidth: parts.Unknown, OpenLoopGain: parts.Unknown, LeadOhm: parts.Unknown, LeadF: parts.Unknown,
	}
}

// outputImpedance returns the magnitude of the output banks' impedance at a
// frequency [ohm], at typical values, bias and 25 degC.
func (z *sizer) outputImpedance(f float64) float64 {
	var y complex128
	for i := range z.draft.OutputCapacitors {
		c := &z.draft.OutputCapacitors[i]
		esr, _ := c.ESRAt(parts.ReferenceDegC, 0)
		y += 1 / complex(esr, -1/(2*math.Pi*f*c.CapacitanceAt(z.req.Output, parts.ReferenceDegC, 0)))
	}
	return 1 / math.Hypot(real(y), imag(y))
}
