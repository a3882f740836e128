package sizing

import (
	"math"

	"railproof/calc/parts"
)

// input sets the windows of the input capacitance and its series resistance and
// fills the bank. Ripple and RMS have their worst case where the duty ratio is
// nearest to one half (to an odd multiple of 1/(2 N) for N phases), and with ripple
// slightly below: both are searched over the input range.
func (z *sizer) input() {
	b, ok := z.newBank(z.choice.InputKind, z.req.Input.Max, z.req.Input.Max, z.fs, "input/max_v")
	if !ok {
		return
	}
	dv := z.want.InputRipple
	n := int(z.phases)
	current := func(c *corner) InputCurrent {
		valley, peak := z.swing(c)
		return NewInputCurrent(n, c.i, peak-valley, c.duty)
	}
	c, q := z.worst(bothLoads, func(c *corner) float64 {
		i := current(c)
		return i.RippleCharge(n, z.fsLow, b.tau)
	})
	_, ideal := z.worstInput(func(vin float64) corner {
		return corner{Corner: Corner{Input: vin, Duty: IdealDuty(vin, z.req.Output)}}
	}, func(c *corner) float64 {
		i := NewInputCurrent(n, z.req.LoadCurrent.Max/z.phases, 0, c.Duty)
		return i.RippleCharge(n, z.fs, 0) / dv
	})
	formula, inputs := z.inputFormula(&c, q, b.tau)
	v := modelMargin * q / dv
	bound := Bound{
		Side: AtLeast, Constraint: "input-ripple", Field: "targets/input_ripple_pp_v", Value: v, Factor: b.left, Part: v / b.left, Ideal: ideal, Corner: c.Corner,
		Formula: formula, Inputs: append(inputs, Input{"kM", modelMargin, "1"}, Input{"dV", dv, "V"}),
		Source: "charge of the high-side current about its mean, exact for straight ramps; Texas Instruments TPS54332 data sheet SLVS875D, eq. 6",
	}
	z.inputCorner, z.inputRMS = z.worst(bothLoads, func(c *corner) float64 {
		i := current(c)
		return i.RMS()
	})
	d := z.draft
	d.InputCapacitors = []parts.Capacitor{b.fill(z, bound.Part, z.inputRMS*currentMargin, z.fs, bound.Field)}
	filled := &d.InputCapacitors[0]
	w := Window{Name: "input_capacitance_f", Unit: "F", Series: z.choice.CapacitorSeries, Preferred: filled.Capacitance, Count: filled.Count, Chosen: b.least(filled), Bounds: []Bound{bound}}
	z.ans.Windows = append(z.ans.Windows, w)
	if z.failed() {
		return
	}
	z.ans.Windows = append(z.ans.Windows, z.inputResistance(&b, filled, &c))
}

// inputFormula gives the charge in symbols where both extremes lie on the edges of
// one phase's current, and as a number where they do not.
func (z *sizer) inputFormula(c *corner, q, tau float64) (string, []Input) {
	valley, peak := z.swing(c)
	di := peak - valley
	flat := c.i*c.duty*(1-c.duty)/z.fsLow + tau*(c.i+di/2)
	if z.phases == 1 && math.Abs(flat/q-1) < 1e-9 {
		return "C = kM * (I * D * (1 - D) / fs + tau * (I + dI / 2)) / dV",
			[]Input{{"I", c.i, "A"}, {"D", c.duty, "1"}, {"fs", z.fsLow, "Hz"}, {"tau", tau, "s"}, {"dI", di, "A"}}
	}
	return "C = kM * Q / dV", []Input{{"Q", q, "C"}}
}

// inputResistance returns the window of the series resistance: what the charge
// ripple leaves, over the step of the current at turn-off.
func (z *sizer) inputResistance(b *bank, filled *parts.Capacitor, c *corner) Window {
	n := int(z.phases)
	valley, peak := z.swing(c)
	i := NewInputCurrent(n, c.i, peak-valley, c.duty)
	capacitance, q, step := b.least(filled), i.RippleCharge(n, z.fsLow, 0), i.Step()
	dv := z.want.InputRipple / modelMargin
	v := (dv - q/capacitance) / step
	return Window{
		Name: "input_esr_ohm", Unit: "Ohm", Preferred: math.NaN(), Count: filled.Count, Chosen: b.most(filled),
		Bounds: []Bound{{
			Side: AtMost, Constraint: "input-ripple", Field: "targets/input_ripple_pp_v", Value: v, Factor: b.grown, Part: v / b.grown, Ideal: z.want.InputRipple / (c.i + (peak-valley)/2), Corner: c.Corner,
			Formula: "ESR = (dV - Q / C) / dI",
			Inputs:  []Input{{"dV", dv, "V"}, {"Q", q, "C"}, {"C", capacitance, "F"}, {"dI", step, "A"}},
			Source:  "charge and resistive ripple added; Texas Instruments TPS40192 data sheet SLUS719E, eq. 14",
		}},
	}
}
