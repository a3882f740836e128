package sizing

import (
	"math"

	"railproof/calc/parts"
	"railproof/calc/transient"
)

// output sets the windows of the output capacitance and its series resistance and
// fills the banks: one of the chosen kind, and a second of larger pieces where load
// step or hold-up ask for more than mostPieces of the first.
func (z *sizer) output() {
	fsum := z.phases * z.fs
	stress := z.voHigh
	if s := z.want.LoadStep; known(s.Step) && known(s.Deviation) {
		stress += s.Deviation
	}
	first, ok := z.newBank(z.choice.OutputKind, z.voHigh, stress, fsum, "output/voltage_v")
	if !ok {
		return
	}
	ripple, steady := z.rippleCapacitance(&first)
	slow := z.slowBounds(&first)
	if z.failed() {
		return
	}
	_, most := z.worst(bothLoads, func(c *corner) float64 {
		v, p := z.swing(c)
		s, _ := z.summed(c, p-v)
		return s
	})
	rms := most / math.Sqrt(12)
	need, field := neediest(&ripple, slow)
	second, two := bank{}, false
	if need > mostPieces*first.piece.Capacitance && need > 1.5*ripple.Part {
		second, two = z.bulk(stress, fsum)
	}
	d := z.draft
	w := Window{Name: "output_capacitance_f", Unit: "F", Series: z.choice.CapacitorSeries, Bounds: []Bound{ripple}}
	if !two {
		d.OutputCapacitors = []parts.Capacitor{first.fill(z, need, rms, fsum, field)}
		w.add(slow)
		z.describe(w, 0, &first, slow, &ripple, &steady)
		return
	}
	slow = z.slowBounds(&second)
	need, field = neediest(&Bound{}, slow)
	d.OutputCapacitors = []parts.Capacitor{first.fill(z, ripple.Part, rms, fsum, ripple.Field), second.fill(z, need, rms, fsum, field)}
	z.describe(w, 0, &first, nil, &ripple, &steady)
	w.Bounds = nil
	w.add(slow)
	z.describe(w, 1, &second, slow, nil, nil)
}

// add appends the bounds by load step and hold-up.
func (w *Window) add(slow []chargeBound) {
	for i := range slow {
		w.Bounds = append(w.Bounds, slow[i].Bound)
	}
}

// describe completes the window of a filled bank's capacitance and adds it with that
// of the bank's series resistance.
func (z *sizer) describe(w Window, k int, b *bank, slow []chargeBound, ripple *Bound, r *steadyRipple) {
	filled := &z.draft.OutputCapacitors[k]
	w.Bank, w.Preferred, w.Count, w.Chosen = k, filled.Capacitance, filled.Count, b.least(filled)
	z.ans.Windows = append(z.ans.Windows, w)
	if z.failed() {
		return
	}
	esr := Window{Name: "output_esr_ohm", Unit: "Ohm", Bank: k, Preferred: math.NaN(), Count: filled.Count, Chosen: b.most(filled)}
	if ripple != nil {
		esr.Bounds = append(esr.Bounds, z.rippleResistance(b, filled, ripple, r))
	}
	for i := range slow {
		esr.Bounds = append(esr.Bounds, slow[i].resistance(b, filled))
	}
	z.ans.Windows = append(z.ans.Windows, esr)
}

// neediest returns the greatest rated capacitance that the bounds ask for, and the
// target behind it.
func neediest(ripple *Bound, slow []chargeBound) (rated float64, field string) {
	rated, field = ripple.Part, ripple.Field
	for i := range slow {
		if slow[i].Part > rated {
			rated, field = slow[i].Part, slow[i].Field
		}
	}
	return rated, field
}

// bulk returns the second kind of bank for the voltage: polymer where it is made
// for it, wet electrolytic above.
func (z *sizer) bulk(stress, fs float64) (bank, bool) {
	for _, kind := range [...]parts.CapacitorKind{parts.AluminiumPolymer, parts.AluminiumElectrolytic} {
		if m := makeOf(kind); m.derating*stress <= m.ratings[len(m.ratings)-1] {
			return z.newBank(kind, z.voHigh, stress, fs, "output/voltage_v")
		}
	}
	return bank{}, false
}

// steadyRipple is the current into the output capacitors at the corner that decides.
type steadyRipple struct {
	sum    float64 // [A] peak to peak, of all phases together
	rising float64 // [1] part of its period in which it rises
	slope  float64 // [A/s] by which the slope of one phase changes at an edge
}

// rippleCapacitance returns the bound by steady ripple and the current behind it.
func (z *sizer) rippleCapacitance(b *bank) (Bound, steadyRipple) {
	dv, fs := z.ripple, z.phases*z.fsLow
	// Of a kind of capacitor, series inductance times capacitance does not depend on
	// how many are paralleled either: the edge step is an addend of the charge.
	lambda := b.piece.ESL * b.left * b.piece.Capacitance
	figure := func(c *corner) (need float64, r steadyRipple) {
		valley, peak := z.swing(c)
		r.sum, r.rising = z.summed(c, peak-valley)
		r.slope = c.bridge * (peak - valley) / c.flux(z.fsLow)
		need = lambda * r.slope / dv
		if r.sum > 0 {
			need += modelMargin * CapacitanceForRipple(r.sum, r.rising, fs, dv, b.tau)
		}
		return need, r
	}
	c, v := z.worst(bothLoads, func(c *corner) float64 { need, _ := figure(c); return need })
	_, r := figure(&c)
	shape, inputs := shapeFormula(r.rising, b.tau*fs)
	return Bound{
		Side: AtLeast, Constraint: "output-ripple", Field: "targets/output_ripple_pp_v", Value: v, Factor: b.left, Part: v / b.left, Corner: c.Corner,
		Ideal:   z.idealRippleCapacitance(),
		Formula: "C = (kM * dI * (" + shape + ") / (N * fs) + lambda * dIdt) / dV",
		Inputs: append(inputs, Input{"kM", modelMargin, "1"}, Input{"dI", r.sum, "A"}, Input{"N", z.phases, "1"}, Input{"fs", z.fsLow, "Hz"},
			Input{"lambda", lambda, "H.F"}, Input{"dIdt", r.slope, "A/s"}, Input{"dV", dv, "V"}),
		Source: "triangular current into capacitance and series resistance, exact, and the edge step ESL Vin/L; derived, onsemi NCP3170/D, eq. 16 and 17",
	}, r
}

// shapeFormula returns ΔV fs C/ΔI in symbols, as rippleShape takes it.
func shapeFormula(rising, x float64) (string, []Input) {
	d := math.Min(rising, 1-rising)
	switch {
	case x == 0:
		return "1/8", nil
	case x <= d/2:
		return "1/8 + x^2 / (2 * d * (1 - d))", []Input{{"x", x, "1"}, {"d", d, "1"}}
	case x < (1-d)/2:
		return "(1 - d) / 8 + x / 2 + x^2 / (2 * (1 - d))", []Input{{"x", x, "1"}, {"d", d, "1"}}
	}
	return "x", []Input{{"x", x, "1"}}
}

// idealRippleCapacitance is the textbook value with the rated inductance:
// ΔI/(8 N fs ΔV) at the input with the greatest summed ripple.
func (z *sizer) idealRippleCapacitance() float64 {
	_, v := z.worstInput(func(vin float64) corner {
		return corner{Corner: Corner{Input: vin, Duty: IdealDuty(vin, z.req.Output)}}
	}, func(c *corner) float64 {
		sum := RippleCurrent(c.Input, z.req.Output, z.rated, z.fs)
		if z.phases > 1 {
			sum = c.Input / (z.rated * z.fs) * InterleavedRipple(int(z.phases), c.Duty)
		}
		return CapacitanceForRipple(sum, 0.5, z.phases*z.fs, z.ripple, 0)
	})
	return v
}

// slowBounds returns the bounds by load step and hold-up for a bank.
func (z *sizer) slowBounds(b *bank) []chargeBound {
	bounds := z.stepBounds(b)
	if h := z.want.HoldUp; known(h.Time) {
		bounds = append(bounds, z.holdUp(b)...)
	}
	return bounds
}

// What the output of the drafts' closed loops does after a load step, measured cycle
// by cycle on the drafts of TestLoadStepsOfTheDrafts: after some periods it decays
// towards its band at a rate below that of the crossover.
const (
	settlePeriods = 3.5 // [1]
	settleRate    = 9.0 // [1] crossover's angular frequency over the rate of decay
)

// stepAllowance returns what the load step may move the output: the deviation less
// half the steady ripple, or, where less, what decays into the recovery band in the
// time allowed.
//
//	ΔV exp(−2π fc (tr − 3.5/fs)/9) ≤ band
func (z *sizer) stepAllowance() allowance {
	s := z.want.LoadStep
	a := allowance{
		within: s.Deviation - z.ripple/2, field: "targets/load_step/deviation_v",
		formula: "(dVs - dVr / 2)", inputs: []Input{{"dVs", s.Deviation, "V"}, {"dVr", z.ripple, "V"}},
	}
	if !known(s.Recovery) {
		return a
	}
	band, fc := transient.RecoveryBand*z.req.Output, z.share*z.fs
	settling := math.Max(0, s.Recovery-settlePeriods/z.fs)
	if v := band * math.Exp(2*math.Pi*fc*settling/settleRate); v < a.within {
		a = allowance{
			within: v, field: "targets/load_step/recovery_s",
			formula: "(vb * exp(2 * pi * fc * ts / 9))", inputs: []Input{{"vb", band, "V"}, {"fc", fc, "Hz"}, {"ts", settling, "s"}},
		}
	}
	return a
}

// stepBounds returns the bounds by the load step.
func (z *sizer) stepBounds(b *bank) []chargeBound {
	s := z.want.LoadStep
	if !known(s.Step) || !known(s.Deviation) {
		return nil
	}
	a := z.stepAllowance()
	dv := a.within
	n, l := z.phases, z.mostL
	// The step may come at the worse extreme of the ripple.
	halfRipple := func(c *corner) float64 {
		v, p := z.swing(c)
		sum, _ := z.summed(c, p-v)
		return sum / 2
	}
	reach := func(c *corner) float64 { return c.on - (1-z.dutyMost)*c.bridge }
	up, q := z.worst(greatestLoad, func(c *corner) float64 {
		i := s.Step + halfRipple(c)
		return l * i * i / (2 * n * reach(c))
	})
	i := s.Step + halfRipple(&up)
	bounds := []chargeBound{b.chargeBound("step-application", "L * dI^2 / (2 * N * Vr)", q, i, a,
		CapacitanceForApplication(z.req.Input.Min, z.req.Output, z.rated/n, s.Step, s.Deviation, 1), up.Corner,
		"charge between load and rising inductor current, derived", Input{"L", l, "H"}, Input{"N", n, "1"}, Input{"Vr", reach(&up), "V"})}
	down, q := z.worst(greatestLoad, func(c *corner) float64 {
		i := s.Step + halfRipple(c)
		return dv * CapacitanceForRelease(l/n, i, c.Output, dv)
	})
	i = s.Step + halfRipple(&down)
	bounds = append(bounds, b.chargeBound("step-release", "L * dI^2 / (N * (2 * Vo + dV))", q, i, a,
		CapacitanceForRelease(z.rated/n, s.Step, z.req.Output, s.Deviation), down.Corner,
		"energy balance; Texas Instruments TPS40200 data sheet SLUS659F, eq. 15", Input{"L", l, "H"}, Input{"N", n, "1"}, Input{"Vo", down.Output, "V"}, Input{"dV", dv, "V"}))
	wait, t := z.worst(greatestLoad, func(c *corner) float64 { return (1 - c.duty) / (n * z.fsLow) })
	bounds = append(bounds, b.chargeBound("step-waiting", "dI * tw", s.Step*t, s.Step, a,
		CapacitanceForWaiting(s.Step, (1-IdealDuty(z.req.Input.Max, z.req.Output))/(n*z.fs), s.Deviation), wait.Corner,
		"longest time without energy; Texas Instruments TPS40200 data sheet SLUS659F", Input{"tw", t, "s"}))
	fc := crossoverRatio * z.fs
	return append(bounds, b.chargeBound("step-bandwidth", "dI / (2 * pi * fc)", s.Step/(2*math.Pi*fc), s.Step, a,
		CapacitanceForBandwidth(s.Step, z.share*z.fs, s.Deviation), Corner{Frequency: z.fsLow, Input: math.NaN(), Output: math.NaN(), Load: z.req.LoadCurrent.Max, Duty: math.NaN()},
		"output impedance of a closed loop at its crossover, estimate", Input{"fc", fc, "Hz"}))
}

// holdUp returns the bound by hold-up. The capacitance that counts is the mean over
// the voltages passed, which under bias is more than at the full voltage.
func (z *sizer) holdUp(b *bank) []chargeBound {
	h, io := z.want.HoldUp, z.req.LoadCurrent.Max
	if !(h.To < z.voLow) {
		z.conflict("hold-up", h.To, z.voLow, "V", "the voltage to be held is not below the least output voltage", "targets/hold_up/to_v", "output/voltage_v")
		return nil
	}
	within := z.voLow - z.ripple/2 - h.To
	a := allowance{within: within, field: "targets/hold_up/time_s", formula: "(Vo - dVr / 2 - Vto)", inputs: []Input{{"Vo", z.voLow, "V"}, {"dVr", z.ripple, "V"}, {"Vto", h.To, "V"}}}
	bound := b.chargeBound("hold-up", "Io * th", io*h.Time, io, a, CapacitanceForHoldUp(z.req.Output, h.To, io, h.Time),
		Corner{Input: math.NaN(), Output: z.voLow, Load: io, Frequency: math.NaN(), Duty: math.NaN()}, "charge balance at constant current", Input{"Io", io, "A"}, Input{"th", h.Time, "s"})
	mean := math.Inf(1)
	for _, degC := range [3]float64{z.req.AmbientDegC.Min, parts.ReferenceDegC, z.req.AmbientDegC.Max + selfHeating} {
		mean = math.Min(mean, b.piece.CapacitanceBetween(h.To, z.voLow, degC, 1)/b.piece.Capacitance)
	}
	bound.Factor = mean * (1 - capacitanceTol)
	bound.Part = bound.Value / bound.Factor
	return []chargeBound{bound}
}

// rippleResistance returns the bound on a filled bank's series resistance by steady
// ripple: what ESRForRipple leaves at the bank's least capacitance.
func (z *sizer) rippleResistance(b *bank, filled *parts.Capacitor, ripple *Bound, r *steadyRipple) Bound {
	c, fs := b.least(filled), z.phases*z.fsLow
	dv := (z.ripple - filled.BankESL()*r.slope) / modelMargin
	v := ESRForRipple(r.sum, r.rising, fs, c, dv)
	formula, inputs := resistanceFormula(r.rising, dv*fs*c/r.sum)
	return Bound{
		Side: AtMost, Constraint: "output-ripple", Field: ripple.Field, Value: v, Factor: b.grown, Part: v / b.grown, Ideal: z.ripple / r.sum, Corner: ripple.Corner,
		Formula: formula, Inputs: append(inputs, Input{"dV", dv, "V"}, Input{"dI", r.sum, "A"}, Input{"N", z.phases, "1"}, Input{"fs", z.fsLow, "Hz"}, Input{"C", c, "F"}),
		Source: ripple.Source,
	}
}

// resistance returns the bound on a filled bank's series resistance by the same
// constraint: what the charge leaves of the voltage.
func (s *chargeBound) resistance(b *bank, filled *parts.Capacitor) Bound {
	// Under hold-up the capacitance is the mean over the voltages passed.
	c := b.least(filled) * s.Factor / b.left
	v := (s.within - s.charge/c) / s.current
	return Bound{
		Side: AtMost, Constraint: s.Constraint, Field: s.Field, Value: v, Factor: b.grown, Part: v / b.grown, Ideal: s.within / s.current, Corner: s.Corner,
		Formula: "ESR = (dV - Q / C) / dI", Inputs: []Input{{"dV", s.within, "V"}, {"Q", s.charge, "C"}, {"C", c, "F"}, {"dI", s.current, "A"}},
		Source: s.Source,
	}
}

// resistanceFormula returns the branch of ESRForRipple in symbols, y being
// ΔV N fs C/ΔI.
func resistanceFormula(rising, y float64) (string, []Input) {
	d := math.Min(rising, 1-rising)
	switch {
	case y <= rippleShape(rising, d/2):
		return "ESR = sqrt(2 * d * (1 - d) * (dV * N * fs * C / dI - 1/8)) / (N * fs * C)", []Input{{"d", d, "1"}}
	case y < (1-d)/2:
		return "ESR = (1 - d) / 2 * (sqrt(8 * dV * N * fs * C / (dI * (1 - d))) - 1) / (N * fs * C)", []Input{{"d", d, "1"}}
	}
	return "ESR = dV / dI", nil
}
