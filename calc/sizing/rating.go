package sizing

import (
	"math"

	"railproof/calc/stage"
)

// ratings lists the stress that each part must carry, each at the operating point
// that demands it: whole points are compared, so that no stress mixes ends that
// cannot coincide.
func (z *sizer) ratings() {
	z.highSideRatings()
	z.rectifierRatings()
	z.inductorRatings()
	z.capacitorRatings()
	z.rating("controller", "voltage_v", "input_v", z.req.Input.Max, voltageMargin, "V", z.blocking(), "V = Vin", "blocks or rides on the input", Input{"Vin", z.req.Input.Max, "V"})
}

func (z *sizer) rating(part, name, field string, applied, margin float64, unit string, c Corner, formula, source string, inputs ...Input) {
	z.ans.Ratings = append(z.ans.Ratings, Rating{
		Part: part, Name: name, Field: field, Applied: applied, Required: applied * margin, Unit: unit, Corner: c,
		Formula: formula, Inputs: inputs, Source: source,
	})
}

// blocking is the corner of every blocked voltage: the greatest input, whatever the
// load.
func (z *sizer) blocking() Corner {
	return Corner{Input: z.req.Input.Max, Output: math.NaN(), Load: math.NaN(), Frequency: math.NaN(), Duty: math.NaN()}
}

// swingInputs gives mean and ripple of a corner in symbols.
func (z *sizer) swingInputs(c *corner) (valley, peak float64, in []Input) {
	valley, peak = z.swing(c)
	return valley, peak, []Input{{"I1", valley, "A"}, {"I2", peak, "A"}, {"I", c.i, "A"}, {"D", c.duty, "1"}}
}

const (
	trapezoid = "R. W. Erickson, D. Maksimović, Fundamentals of Power Electronics, appendix A"
	flux      = "volt-second balance and the inductor's flux curve"
)

func (z *sizer) highSideRatings() {
	z.rating("high_side", "voltage_v", "drain_source_v", z.req.Input.Max, voltageMargin, "V", z.blocking(), "V = Vin", "the switch blocks the input; ringing is the margin's", Input{"Vin", z.req.Input.Max, "V"})
	z.peakRating("high_side", "")
	c, v := z.worst(bothLoads, func(c *corner) float64 {
		valley, peak := z.swing(c)
		return TrapezoidRMS(valley, peak, c.duty)
	})
	_, _, in := z.swingInputs(&c)
	z.rating("high_side", "rms_a", "", v, currentMargin, "A", c.Corner, "Irms = sqrt(D * (I1^2 + I1 * I2 + I2^2) / 3)", trapezoid, in...)
	c, v = z.worst(greatestLoad, func(c *corner) float64 { return c.duty * c.i })
	_, _, in = z.swingInputs(&c)
	z.rating("high_side", "mean_a", "drain_current_a", v, currentMargin, "A", c.Corner, "Imean = D * I", trapezoid, in...)
}

func (z *sizer) rectifierRatings() {
	part, voltage, mean := "low_side", "drain_source_v", "drain_current_a"
	if z.req.Rectifier == stage.DiodeRectified {
		part, voltage, mean = "diode", "reverse_v", "forward_a"
	}
	z.rating(part, "voltage_v", voltage, z.req.Input.Max, voltageMargin, "V", z.blocking(), "V = Vin", "the rectifier blocks the input; ringing is the margin's", Input{"Vin", z.req.Input.Max, "V"})
	z.peakRating(part, "")
	c, v := z.worst(bothLoads, func(c *corner) float64 {
		valley, peak := z.swing(c)
		return TrapezoidRMS(valley, peak, 1-c.duty)
	})
	_, _, in := z.swingInputs(&c)
	z.rating(part, "rms_a", "", v, currentMargin, "A", c.Corner, "Irms = sqrt((1 - D) * (I1^2 + I1 * I2 + I2^2) / 3)", trapezoid, in...)
	c, v = z.worst(greatestLoad, func(c *corner) float64 { return (1 - c.duty) * c.i })
	_, _, in = z.swingInputs(&c)
	z.rating(part, "mean_a", mean, v, currentMargin, "A", c.Corner, "Imean = (1 - D) * I", trapezoid, in...)
}

func (z *sizer) peakRating(part, field string) {
	c, v := z.worst(bothLoads, func(c *corner) float64 { _, peak := z.swing(c); return peak })
	_, _, in := z.swingInputs(&c)
	z.rating(part, "peak_a", field, v, currentMargin, "A", c.Corner, "Ipk = I2", flux, in...)
}

func (z *sizer) inductorRatings() {
	c, v := z.worst(bothLoads, func(c *corner) float64 { _, peak := z.swing(c); return peak })
	_, _, in := z.swingInputs(&c)
	z.peakMost = v
	z.rating("inductor", "peak_a", "saturation_a", v, z.saturationAt/v, "A", c.Corner, "Ipk = I2", flux, in...)
	c, v = z.worst(bothLoads, func(c *corner) float64 {
		valley, peak := z.swing(c)
		return TriangleRMS(c.i, peak-valley)
	})
	_, _, in = z.swingInputs(&c)
	z.rating("inductor", "rms_a", "heating_a", v, currentMargin, "A", c.Corner, "Irms = sqrt(I^2 + (I2 - I1)^2 / 12)", trapezoid, in...)
	z.inductorRMS = v
	i := z.req.LoadCurrent.Max / z.phases
	z.rating("inductor", "mean_a", "", i, currentMargin, "A", Corner{Input: math.NaN(), Output: math.NaN(), Load: z.req.LoadCurrent.Max, Frequency: math.NaN(), Duty: math.NaN()},
		"Imean = Io / N", "charge balance of the output capacitor", Input{"Io", z.req.LoadCurrent.Max, "A"}, Input{"N", z.phases, "1"})
}

func (z *sizer) capacitorRatings() {
	d := z.draft
	rise := 0.0
	if s := z.want.LoadStep; known(s.Step) && known(s.Deviation) {
		rise = s.Deviation
	}
	v := z.voHigh + z.ripple/2 + rise
	fs := z.phases * z.fs
	for k := range d.OutputCapacitors {
		p := &d.OutputCapacitors[k]
		part := []string{"output_capacitors/0", "output_capacitors/1"}[k]
		z.rating(part, "voltage_v", "voltage_v", v, p.Rating.Voltage/v, "V", Corner{Input: math.NaN(), Output: z.voHigh, Load: math.NaN(), Frequency: math.NaN(), Duty: math.NaN()},
			"V = Vo + dV / 2 + dVs", "output at its upper tolerance, ripple and overshoot", Input{"Vo", z.voHigh, "V"}, Input{"dV", z.ripple, "V"}, Input{"dVs", rise, "V"})
		c, sum := z.worst(bothLoads, func(c *corner) float64 {
			v, p := z.swing(c)
			s, _ := z.summed(c, p-v)
			return s
		})
		share := z.mostShare(k, fs)
		pieces := p.Pieces()
		z.rating(part, "rms_a", "ripple_current_a", sum*share/(math.Sqrt(12)*pieces), 1, "A", c.Corner, "Irms = dI * s / (sqrt(12) * n)", trapezoid+"; banks share by impedance at the ripple frequency",
			Input{"dI", sum, "A"}, Input{"s", share, "1"}, Input{"n", pieces, "1"})
	}
	p := &d.InputCapacitors[0]
	z.rating("input_capacitors/0", "voltage_v", "voltage_v", z.req.Input.Max, p.Rating.Voltage/z.req.Input.Max, "V", z.blocking(), "V = Vin", "rides on the input", Input{"Vin", z.req.Input.Max, "V"})
	valley, peak, in := z.swingInputs(&z.inputCorner)
	formula := "Irms = sqrt(D * (I^2 + (I2 - I1)^2 / 12) - (D * I)^2) / n"
	if z.phases > 1 {
		i := NewInputCurrent(int(z.phases), z.inputCorner.i, peak-valley, z.inputCorner.duty)
		formula, in = "Irms = Ic / n", []Input{{"Ic", i.RMS(), "A"}}
	}
	z.rating("input_capacitors/0", "rms_a", "ripple_current_a", z.inputRMS/p.Pieces(), 1, "A", z.inputCorner.Corner, formula, trapezoid, append(in, Input{"n", p.Pieces(), "1"})...)
}
