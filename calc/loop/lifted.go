package loop

import (
	"math"
	"math/cmplx"

	"railproof/calc/statespace"
	"railproof/calc/switched"
)

// lifted is the loop of unequal phases as seen by the N decisions of a period, each
// by a comparator of its own. The map over the period is exact and does not change
// with time; a sine at the control voltage is answered at its own frequency and at
// those that lie multiples of the switching frequency beside it.
//
// Let the control voltage at the decisions be c = u + y, with a sine u(k) = e^{jω t(k)}
// added to it and y fed back, loop closed. The gain told is what is read at the sine's
// own frequency, everything else that goes round left as it is:
//
//	T(jω) = -Y/C, Y and C the means of y(k) e^{-jω t(k)} and c(k) e^{-jω t(k)}
//	1 + T = 1/C, since C = 1 + Y
//
// Its 1 + T is zero where, and only where, an eigenvalue of the closed map lies on the
// unit circle at that frequency. With equal phases nothing appears beside the sine and
// T is the usual gain. At half the decision rate itself the sine is replaced by the
// alternation of one decision to the next, which has a real gain.
//
// Source: lifting of a periodic system, as in texts on multirate and periodic control
// (remembered, unverified). Checked against injection into the switched circuit in
// package transient.
type lifted struct {
	count   int
	when    [switched.MaxPhases]float64                     // [s] of each decision, after the start of the window
	closed  statespace.Transfer                             // the closed map
	columns [2 * switched.MaxPhases]statespace.Point        // [any/V] of the window's end, by a volt added at each decision; then rows
	rows    []statespace.Point                              // [V] fed back at each decision, by the state at the window's start
	direct  [switched.MaxPhases][switched.MaxPhases]float64 // [1] fed back at a decision, by a volt added at an earlier one
}

// set takes the closed loop over from a model whose decisions are delayed as told.
func (l *lifted) set(s *Sampled, delays *[switched.MaxPhases]statespace.Functional) {
	n, sense := s.joint.N, s.plant.sense()
	l.count, l.rows = s.count, l.columns[s.count:2*s.count]
	var late [switched.MaxPhases][switched.MaxPhases]float64 // [s/V] of a decision, by a volt added at another
	for k := range s.count {
		d := &s.decisions[k]
		l.when[k], l.rows[k] = d.at, statespace.Point(d.control)
		l.columns[k], l.direct[k] = statespace.Point{}, [switched.MaxPhases]float64{}
		late[k][k] = 1 / d.slope
		for e := range k {
			for i := range n {
				l.rows[k][i] += float64(d.voltage[e] * delays[e][i])
			}
			by := (d.voltage[e] - float64(sense*d.amperes[e])) / d.slope
			for u := range e + 1 {
				l.direct[k][u] += float64(d.voltage[e] * late[e][u])
				late[k][u] += float64(by * late[e][u])
			}
		}
	}
	for k := range s.count {
		enter := &s.decisions[k].enter
		for u := range k + 1 {
			for i := range n {
				l.columns[u][i] += float64(enter[i] * late[k][u])
			}
		}
	}
	var none statespace.Point
	l.closed.Reduce(&s.closed, &none, &none, l.columns[:2*s.count]...)
}

// at returns the gain of a sine that turns by z over the window [Hz].
func (l *lifted) at(s *Sampled, frequency float64, z complex128) complex128 {
	n := s.joint.N
	var u [switched.MaxPhases]complex128
	for k := range l.count {
		sin, cos := math.Sincos(2 * math.Pi * frequency * l.when[k])
		u[k] = complex(cos, sin)
		if frequency == s.plant.Nyquist() {
			u[k] = complex(1-2*float64(k%2), 0)
		}
	}
	var x statespace.ComplexPoint
	for k := range l.count {
		for i := range n {
			x[i] += scale(u[k], l.columns[k][i])
		}
	}
	l.closed.Solve(z, &x)
	compared := complex128(0)
	for k := range l.count {
		c := u[k] + dotComplex(l.rows[k][:n], &x)
		for e := range k {
			c += scale(u[e], l.direct[k][e])
		}
		compared += c * conjugate(u[k])
	}
	return complex(float64(l.count), 0)/compared - 1
}

// images calls f with the frequencies up to half the decision rate at which an
// eigenvalue of the map over a window may be heard.
func (s *Sampled) images(x complex128, f func(frequency float64)) {
	rate := 1 / s.window.length
	base := cmplx.Phase(x) / (2 * math.Pi) * rate
	if s.count == 1 {
		f(base)
		return
	}
	for m := -s.count; m <= s.count; m++ {
		if at := base + float64(m)*rate; at >= 0 && at <= s.plant.Nyquist() {
			f(at)
		}
	}
}
