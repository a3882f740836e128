package sizing

import "math"

// InputCurrent is the summed high-side current of equal interleaved phases in
// continuous conduction. It repeats every N-th of the period and consists of two
// straight ramps there: m + 1 phases on, then m, with m = floor(N D).
type InputCurrent struct {
	Mean float64 // [A]
	wide [2]float64
	from [2]float64
	to   [2]float64
}

// NewInputCurrent returns the summed current.
//
//	phases   number of phases N
//	i, di    [A] mean inductor current of one phase and its ripple
//	duty     [1]
func NewInputCurrent(phases int, i, di, duty float64) InputCurrent {
	n := float64(phases)
	m := math.Floor(n * duty)
	high := n*duty - m // part of the N-th in which m + 1 phases are on
	c := InputCurrent{Mean: n * duty * i, wide: [2]float64{high, 1 - high}}
	// Phase k is on for k/N of the period longer than the latest one; the ramp
	// rises by di over the fraction duty.
	at := func(on, u float64) float64 {
		sum := 0.0
		for k := 0.0; k < on; k++ {
			sum += i - di/2 + di*(u+k)/(n*duty)
		}
		return sum
	}
	c.from = [2]float64{at(m+1, 0), at(m, high)}
	c.to = [2]float64{at(m+1, high), at(m, 1)}
	return c
}

// RMS returns the RMS of the alternating part [A], which the input capacitors carry.
//
//	sqrt(Σ w (a² + a b + b²)/3),  a, b the ends of each ramp less the mean
//
// Source: trapezoid form of R. W. Erickson, D. Maksimović, Fundamentals of Power
// Electronics, appendix A. Checked by TestInterleavedForms against InputRMS,
// InterleavedInputRMS and sampled waveforms.
func (c *InputCurrent) RMS() float64 {
	sum := 0.0
	for k := range c.wide {
		a, b := c.from[k]-c.Mean, c.to[k]-c.Mean
		sum += c.wide[k] * (a*a + a*b + b*b) / 3
	}
	return math.Sqrt(sum)
}

// RippleCharge returns the peak-to-peak input voltage times the capacitance [C] for
// capacitors of time constant tau = ESR C [s], the source supplying the mean only.
//
//	q(t) + τ i(t),  i = Mean − summed current,  q its integral over time
//
// Both ramps are straight, so the extremes lie at their ends or where i + τ di/dt
// is zero: no search. FlatInputRipple is the case di = 0, N = 1.
//
//	fs [Hz], phases as in NewInputCurrent
//
// Source: derived. Checked by TestInterleavedForms against FlatInputRipple and
// sampled waveforms, and by TestClosedFormsAgainstTheEngine.
func (c *InputCurrent) RippleCharge(phases int, fs, tau float64) float64 {
	span := 1 / (float64(phases) * fs) // time of one N-th of the period
	least, most, q := math.Inf(1), math.Inf(-1), 0.0
	see := func(x float64) { least, most = math.Min(least, x), math.Max(most, x) }
	for k := range c.wide {
		t := c.wide[k] * span
		if t == 0 {
			continue
		}
		a, b := c.Mean-c.from[k], c.Mean-c.to[k]
		slope := (b - a) / t
		see(q + tau*a)
		if u := -a/slope - tau; slope != 0 && u > 0 && u < t {
			see(q + a*u + slope*u*u/2 + tau*(a+slope*u))
		}
		q += (a + b) / 2 * t
		see(q + tau*b)
	}
	return most - least
}

// Step returns the peak-to-peak of the summed current [A], which the series
// resistance turns into voltage.
func (c *InputCurrent) Step() float64 {
	least, most := math.Inf(1), math.Inf(-1)
	for k := range c.wide {
		if c.wide[k] > 0 {
			least = math.Min(least, math.Min(c.from[k], c.to[k]))
			most = math.Max(most, math.Max(c.from[k], c.to[k]))
		}
	}
	return most - least
}
