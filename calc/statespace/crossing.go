package statespace

import "math"

// Event is a linear output plus a polynomial of the time since the start of the
// step, h(t) = Output(z(t)) + Offset + Ramp t + Curve t^2, watched for its first
// passage from below zero to zero or above.
type Event struct {
	Output Functional
	Offset float64 // [any]
	Ramp   float64 // [any/s]
	Curve  float64 // [any/s2]
}

// At returns h at the time t after the start of the step, where the point is z.
func (e *Event) At(z *Point, w int, t float64) float64 {
	return e.Output.At(z, w) + e.Offset + float64((e.Ramp+float64(e.Curve*t))*t)
}

// Cross moves z to the point at which e passes zero upwards within the time
// limit <= Step, and returns the time taken. The event must be below zero at the
// start and not below at the limit; then one crossing is found to the resolution
// of the arithmetic.
func (l *Ladder) Cross(e *Event, z *Point, limit float64) float64 {
	n, m := l.System.N, l.System.M
	w := n + m
	at := 0.0
	var next Point
	last := len(l.rungs) - 1
	for i := 0; i <= last; i++ {
		rung := &l.rungs[i]
		if at+rung.time > limit {
			continue
		}
		rung.apply(&next, z, &l.System)
		if e.At(&next, w, at+rung.time) < 0 {
			*z = next
			at += rung.time
		}
	}
	rest := min(l.rungs[last].time, limit-at)
	if !(rest > 0) {
		return at
	}
	var terms series
	l.expand(&terms, z, rest)
	var c [restTerms + 1]float64
	for p := range c {
		c[p] = dot(e.Output[:n], terms[p][:n])
	}
	for k := 0; k < m; k++ {
		c[0] += e.Output[n+k] * terms[0][n+k]
		c[1] += e.Output[n+k] * l.System.Rate[k] * rest
	}
	c[0] += e.Offset + float64((e.Ramp+float64(e.Curve*at))*at)
	c[1] += (e.Ramp + 2*e.Curve*at) * rest
	c[2] += e.Curve * rest * rest
	r := firstRoot(&c)
	terms.sum(z, r, n, m, rest, &l.System.Rate)
	return at + float64(r*rest)
}

// rootIterations bounds the search below: bisection alone would need 53.
const rootIterations = 60

// firstRoot returns the place in [0, 1] at which the polynomial, below zero at 0,
// reaches zero, by Newton's method kept inside a shrinking bracket.
func firstRoot(c *[restTerms + 1]float64) float64 {
	lo, hi := 0.0, 1.0
	r := 0.5
	if c[1] > 0 {
		r = min(1, max(0, -c[0]/c[1]))
	}
	for range rootIterations {
		v, d := c[restTerms], 0.0
		for p := restTerms - 1; p >= 0; p-- {
			d = v + float64(d*r)
			v = c[p] + float64(v*r)
		}
		if v < 0 {
			lo = r
		} else {
			hi = r
		}
		next := r - v/d
		if !(next >= lo && next <= hi) {
			next = (lo + hi) / 2
		}
		if math.Abs(next-r) <= 1e-15 {
			return next
		}
		r = next
	}
	return r
}
