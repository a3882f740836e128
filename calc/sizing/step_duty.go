package sizing

import (
	"fmt"
	"math"

	"railproof/calc/stage"
)

// regulation sets the ends of the regulated output voltage from the divider, the
// reference and their tolerances, the cheapest grade that keeps the tolerance
// asked for and lies above the voltage to be held.
//
//	Vo = Vref (1 ± r) (1 + Ru (1 ± t)/(Rl (1 ∓ t)))
func (z *sizer) regulation() {
	r, c := z.req, &z.choice
	d, ok := c.DividerSeries.NewDivider(c.Reference, r.Output, c.LowerOhm)
	if !ok {
		z.conflict("reference", c.Reference, r.Output, "V", "the divider cannot set an output below the reference", "output/voltage_v")
		return
	}
	path := z.draft.Board.OutputPath * r.LoadCurrent.Max / r.Output
	var low, high, worst float64
	for _, g := range grades {
		z.grade = g
		low = c.Reference * (1 - g.reference) * (1 + d.Upper/d.Lower*(1-g.resistor)/(1+g.resistor))
		high = c.Reference * (1 + g.reference) * (1 + d.Upper/d.Lower*(1+g.resistor)/(1-g.resistor))
		worst = math.Max(high/r.Output-1, 1-low/r.Output+1.4*path)
		held := !known(z.want.HoldUp.Time) || z.want.HoldUp.To < low
		if held && (!known(r.OutputTolerance) || worst <= r.OutputTolerance) {
			break
		}
	}
	z.voLow, z.voHigh = low, high
	if h := z.want.HoldUp; known(h.Time) && h.To < low {
		z.ripple = math.Min(z.ripple, low-h.To)
	}
	z.ans.Divider = Divider{Divider: d, Reference: c.Reference, WorstError: worst, Series: c.DividerSeries}
	f := &z.draft.Feedback
	*f = stage.Feedback{Present: true, Reference: c.Reference, Upper: d.Upper, Lower: d.Lower}
	if known(r.OutputTolerance) && worst > r.OutputTolerance {
		z.conflict("output-tolerance", worst, r.OutputTolerance, "1", fmt.Sprintf("a reference of %.3g %% and resistors of %.3g %% leave more", 100*z.grade.reference, 100*z.grade.resistor), "output/tolerance_ratio", "output/voltage_v")
	}
}

// duty checks that the controller reaches the duty ratios and on-times that the
// input range asks for, and sets the window of the switching frequency.
func (z *sizer) duty() {
	low := z.at(z.req.Input.Min, z.voHigh, z.req.LoadCurrent.Max, true)
	if math.IsNaN(low.bridge) {
		z.conflict("source-power", 4*z.source*z.voHigh*z.req.LoadCurrent.Max*(1+z.lossShare), z.req.Input.Min*z.req.Input.Min, "V2", "the source resistance lets the source deliver Vin²/(4 R) at most", "input/source_ohm", "input/min_v", "load/max_a")
		return
	}
	// Dead time is made up by a longer command.
	dead := 2 * z.draft.Controller.DeadTime * (1 + deadTimeTol) * z.fsHigh * z.draft.LowSide.BodyDiode / low.bridge
	if need := low.duty + dead; !(need <= z.dutyMost) || !(low.on > 0) {
		z.conflict("greatest-duty", need, z.dutyMost, "1", fmt.Sprintf("at the least input the drops of the stage ask for more than the controller's greatest duty ratio, min(%.3g, 1 - f toff)", z.choice.MaxDutyRatio), "input/min_v", "output/voltage_v", "switching_frequency_hz")
	}
	high := z.shortest()
	w := Window{Name: "switching_frequency_hz", Unit: "Hz", Chosen: z.fs, Preferred: math.NaN()}
	limit := func(constraint, field string, c Corner, fraction, ideal, time float64, formula, symbol string) {
		w.Bounds = append(w.Bounds, Bound{
			Side: AtMost, Constraint: constraint, Field: field, Value: fraction / time, Factor: 1 + frequencyTol, Part: fraction / time / (1 + frequencyTol), Ideal: ideal / time,
			Corner: c, Formula: formula, Inputs: []Input{{"D", c.Duty, "1"}, {symbol, time, "s"}}, Source: "controller timing; Linear Technology LTC3728 data sheet, p. 28",
		})
	}
	if t := z.choice.MinOnTime; t > 0 {
		limit("least-on-time", "input/max_v", high.Corner, high.duty, IdealDuty(z.req.Input.Max, z.req.Output), t, "fs = D / ton", "ton")
	}
	if t := z.choice.MinOffTime; t > 0 {
		limit("least-off-time", "input/min_v", low.Corner, 1-low.duty, 1-IdealDuty(z.req.Input.Min, z.req.Output), t, "fs = (1 - D) / toff", "toff")
	}
	z.ans.Windows = append(z.ans.Windows, w)
	// Dead time lengthens the command, at its least tolerance by this much.
	on := high.duty/z.fsHigh + 2*z.draft.Controller.DeadTime*(1-deadTimeTol)*z.draft.LowSide.BodyDiode/high.bridge
	if on < z.choice.MinOnTime {
		z.conflict("least-on-time", z.choice.MinOnTime, on, "s", "at the greatest input the on-time falls below the controller's least", "input/max_v", "output/voltage_v", "switching_frequency_hz")
	}
	z.shortestOn = on
}

// shortest returns the operating point of the shortest on-time in continuous
// conduction: greatest input, least output, least load, cold.
func (z *sizer) shortest() corner {
	c := z.at(z.req.Input.Max, z.voLow, z.req.LoadCurrent.Min, false)
	c.on, c.off = inductorVoltages(c.bridge, z.voLow, c.i, z.leastDrops)
	c.duty = DropDuty(c.bridge, z.voLow, c.i, z.leastDrops)
	c.Duty, c.Frequency = c.duty, z.fsHigh
	return c
}
