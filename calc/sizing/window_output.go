package sizing

import (
	"math"

	"railproof/calc/parts"
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
	w := Window{Name: "output_capacitance_f", Unit: "F", Series: z.choice.CapacitorSeries}
	ripple, sum, rising := z.rippleCapacitance(&first)
	w.Bounds = append(w.Bounds, ripple)
	slow := z.slowBounds(&first)
	if z.failed() {
		return
	}
	carrier := &first
	need, field := neediest(&ripple, slow)
	_, most := z.worst(bothLoads, func(c *corner) float64 {
		v, p := z.swing(c)
		s, _ := z.summed(c, p-v)
		return s
	})
	rms := most / math.Sqrt(12)
	d := z.draft
	if need > mostPieces*first.piece.Capacitance && need > ripple.Part*1.5 {
		if bulk, ok := z.bulk(stress, fsum); ok {
			carrier = &bulk
			slow = z.slowBounds(carrier)
		}
	}
	if carrier == &first {
		d.OutputCapacitors = []parts.Capacitor{first.fill(z, need, rms, fsum, field)}
	} else {
		need, field = neediest(&Bound{}, slow)
		d.OutputCapacitors = []parts.Capacitor{first.fill(z, ripple.Part, rms, fsum, ripple.Field), carrier.fill(z, need, 0, fsum, field)}
	}
	for _, b := range slow {
		w.Bounds = append(w.Bounds, b.Bound)
	}
	w.Preferred, w.Count = d.OutputCapacitors[0].Capacitance, d.OutputCapacitors[0].Count
	w.Chosen = first.least(&d.OutputCapacitors[0])
	if carrier != &first {
		w.Chosen += carrier.least(&d.OutputCapacitors[1])
	}
	z.ans.Windows = append(z.ans.Windows, w)
	if z.failed() {
		return
	}
	z.ans.Windows = append(z.ans.Windows, z.seriesResistance(&first, carrier, slow, ripple, sum, rising))
	z.outputRMS = rms
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

// rippleCapacitance returns the bound by steady ripple, with the ripple current and
// its rising fraction at the deciding corner.
func (z *sizer) rippleCapacitance(b *bank) (bound Bound, sum, rising float64) {
	dv, fs := z.ripple, z.phases*z.fsLow
	figure := func(c *corner) (need, sum, rising float64) {
		valley, peak := z.swing(c)
		sum, rising = z.summed(c, peak-valley)
		if sum == 0 {
			return 0, 0, 0.5
		}
		return modelMargin * CapacitanceForRipple(sum, rising, fs, dv, b.tau), sum, rising
	}
	c, v := z.worst(bothLoads, func(c *corner) float64 { need, _, _ := figure(c); return need })
	_, sum, rising = figure(&c)
	x := b.tau * fs
	shape, inputs := shapeFormula(rising, x)
	bound = Bound{
		Side: AtLeast, Constraint: "output-ripple", Field: "targets/output_ripple_pp_v", Value: v, Factor: b.left, Part: v / b.left, Corner: c.Corner,
		Ideal:   z.idealRippleCapacitance(),
		Formula: "C = kM * dI * (" + shape + ") / (N * fs * dV)",
		Inputs:  append(inputs, Input{"kM", modelMargin, "1"}, Input{"dI", sum, "A"}, Input{"N", z.phases, "1"}, Input{"fs", z.fsLow, "Hz"}, Input{"dV", dv, "V"}),
		Source:  "triangular current into capacitance and series resistance, exact; derived",
	}
	return bound, sum, rising
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

// stepBounds returns the bounds by the load step. What is allowed for the step is
// the deviation less half the steady ripple.
func (z *sizer) stepBounds(b *bank) []chargeBound {
	s := z.want.LoadStep
	if !known(s.Step) || !known(s.Deviation) {
		return nil
	}
	dv := s.Deviation - z.ripple/2
	const field = "targets/load_step/deviation_v"
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
	bounds := []chargeBound{b.chargeBound("step-application", field, "L * dI^2 / (2 * N * Vr)", q, i, dv,
		CapacitanceForApplication(z.req.Input.Min, z.req.Output, z.rated/n, s.Step, s.Deviation, 1), up.Corner,
		"charge between load and rising inductor current, derived", Input{"L", l, "H"}, Input{"N", n, "1"}, Input{"Vr", reach(&up), "V"})}
	down, q := z.worst(greatestLoad, func(c *corner) float64 {
		i := s.Step + halfRipple(c)
		return dv * CapacitanceForRelease(l/n, i, c.Output, dv)
	})
	i = s.Step + halfRipple(&down)
	bounds = append(bounds, b.chargeBound("step-release", field, "L * dI^2 / (N * (2 * Vo + dV))", q, i, dv,
		CapacitanceForRelease(z.rated/n, s.Step, z.req.Output, s.Deviation), down.Corner,
		"energy balance; Texas Instruments TPS40200 data sheet SLUS659F, eq. 15", Input{"L", l, "H"}, Input{"N", n, "1"}, Input{"Vo", down.Output, "V"}))
	wait, t := z.worst(greatestLoad, func(c *corner) float64 { return (1 - c.duty) / (n * z.fsLow) })
	bounds = append(bounds, b.chargeBound("step-waiting", field, "dI * tw", s.Step*t, s.Step, dv,
		CapacitanceForWaiting(s.Step, (1-IdealDuty(z.req.Input.Max, z.req.Output))/(n*z.fs), s.Deviation), wait.Corner,
		"longest time without energy; Texas Instruments TPS40200 data sheet SLUS659F", Input{"tw", t, "s"}))
	fc := z.leastCrossover()
	return append(bounds, b.chargeBound("step-bandwidth", field, "dI / (2 * pi * fc)", s.Step/(2*math.Pi*fc), s.Step, dv,
		CapacitanceForBandwidth(s.Step, crossoverRatio*z.fs, s.Deviation), Corner{Frequency: z.fsLow, Input: math.NaN(), Output: math.NaN(), Load: z.req.LoadCurrent.Max, Duty: math.NaN()},
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
	bound := b.chargeBound("hold-up", "targets/hold_up/time_s", "Io * th", io*h.Time, io, within, CapacitanceForHoldUp(z.req.Output, h.To, io, h.Time),
		Corner{Input: math.NaN(), Output: z.voLow, Load: io, Frequency: math.NaN(), Duty: math.NaN()}, "charge balance at constant current", Input{"Io", io, "A"}, Input{"th", h.Time, "s"})
	mean := math.Inf(1)
	for _, degC := range [3]float64{z.req.AmbientDegC.Min, parts.ReferenceDegC, z.req.AmbientDegC.Max + selfHeating} {
		mean = math.Min(mean, b.piece.CapacitanceBetween(h.To, z.voLow, degC, 1)/b.piece.Capacitance)
	}
	bound.Factor = mean * (1 - capacitanceTol)
	bound.Part = bound.Value / bound.Factor
	return []chargeBound{bound}
}

// seriesResistance returns the window of the series resistance: by ripple for the
// first bank, by the load step for the bank that carries it.
func (z *sizer) seriesResistance(first, carrier *bank, slow []chargeBound, ripple Bound, sum, rising float64) Window {
	d := z.draft
	w := Window{Name: "output_esr_ohm", Unit: "Ohm", Preferred: math.NaN(), Count: d.OutputCapacitors[0].Count, Chosen: first.most(&d.OutputCapacitors[0])}
	c, fs, dv := first.least(&d.OutputCapacitors[0]), z.phases*z.fsLow, z.ripple/modelMargin
	v := ESRForRipple(sum, rising, fs, c, dv)
	formula, inputs := resistanceFormula(rising, dv*fs*c/sum)
	w.Bounds = append(w.Bounds, Bound{
		Side: AtMost, Constraint: "output-ripple", Field: "targets/output_ripple_pp_v", Value: v, Factor: first.grown, Part: v / first.grown, Ideal: z.ripple / sum, Corner: ripple.Corner,
		Formula: formula, Inputs: append(inputs, Input{"dV", dv, "V"}, Input{"dI", sum, "A"}, Input{"N", z.phases, "1"}, Input{"fs", z.fsLow, "Hz"}, Input{"C", c, "F"}),
		Source: "triangular current into capacitance and series resistance, exact; derived",
	})
	filled := &d.OutputCapacitors[len(d.OutputCapacitors)-1]
	for _, b := range slow {
		c := carrier.least(filled)
		if b.Constraint == "hold-up" {
			c *= b.Factor / carrier.left
		}
		v := (b.within - b.charge/c) / b.current
		w.Bounds = append(w.Bounds, Bound{
			Side: AtMost, Constraint: b.Constraint, Field: b.Field, Value: v, Factor: carrier.grown, Part: v / carrier.grown, Ideal: b.within / b.current, Corner: b.Corner,
			Formula: "ESR = (dV - Q / C) / dI", Inputs: []Input{{"dV", b.within, "V"}, {"Q", b.charge, "C"}, {"C", c, "F"}, {"dI", b.current, "A"}},
			Source: b.Source,
		})
	}
	return w
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

// leastCrossover returns the lowest crossover frequency of the draft's loop.
func (z *sizer) leastCrossover() float64 { return crossoverRatio * z.fs * crossoverLeft }

// crossoverLeft is what tolerances leave of the crossover frequency times the
// capacitance, which in peak current mode depends on the sense gain only.
const crossoverLeft = 0.8 // [1]
