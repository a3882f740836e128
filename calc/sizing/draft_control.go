package sizing

import (
	"math"

	"railproof/calc/parts"
)

const (
	gateOnOhm       = 2.5  // [ohm] driver and resistor, turn-on
	gateOffOhm      = 1.5  // [ohm] turn-off
	senseAtLimit    = 0.5  // [V] current signal at the current limit
	limitOverPeak   = 1.15 // [1] current limit over the greatest current
	slopeOverNeed   = 1.2  // [1] slope compensation over half the falling slope
	comparatorDelay = 4e-8 // [s] of comparator and driver
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
