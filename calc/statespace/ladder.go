package statespace

import (
	"math"
	"slices"
)

// Ladder advances one system by any time up to its Step, exactly: maps over
// Step, Step/2, Step/4 and so on are kept, and the rest below the last of them
// is a short Taylor series. It also finds the time at which an output crosses
// zero, by descending the same maps.
type Ladder struct {
	System System
	Step   float64 // [s]
	rungs  []rung  // over Step / 2^i
	room   []float64
}

// rung is a Map without the room it does not use.
type rung struct {
	time float64   // [s]
	f    []float64 // N rows of N+M
}

func (r *rung) apply(dst, z *Point, s *System) {
	n, w := s.N, s.N+s.M
	times(dst[:n], r.f, z[:w], w)
	for k := 0; k < s.M; k++ {
		dst[n+k] = z[n+k] + float64(s.Rate[k]*r.time)
	}
}

const (
	// rungNorm bounds the norm of A t below the last rung, where restTerms terms
	// of the series leave less than (1/64)^9/9! = 2e-22.
	rungNorm  = 1.0 / 64
	restTerms = 8
)

// NewLadder returns the ladder of s for steps of the given length, and false for
// a system too stiff for them.
func NewLadder(s *System, step float64) (*Ladder, bool) {
	l := &Ladder{System: *s}
	return l, l.Set(step)
}

// Set makes l the ladder of its System for steps of the given length, in the
// memory that it has. It reports false for a system too stiff for them.
func (l *Ladder) Set(step float64) bool {
	s := &l.System
	l.Step = step
	last := halvingsFor(s, step, rungNorm)
	if last > maxHalvings {
		return false
	}
	used := s.N * (s.N + s.M)
	l.rungs = slices.Grow(l.rungs[:0], last+1)[:last+1]
	l.room = slices.Grow(l.room[:0], (last+1)*used)[:(last+1)*used]
	var a, b Map
	now, next := &a, &b
	now.series(s, math.Ldexp(step, -last), taylorTerms, next)
	for i := last; ; i-- {
		l.rungs[i] = rung{math.Ldexp(step, -i), l.room[i*used : (i+1)*used]}
		copy(l.rungs[i].f, now.F[:used])
		if i == 0 {
			return true
		}
		next.Compose(now, now)
		now, next = next, now
	}
}

// Whole sets dst to the point one full Step after z.
func (l *Ladder) Whole(dst, z *Point) { l.rungs[0].apply(dst, z, &l.System) }

// Advance moves z by the time t, 0 <= t <= Step.
func (l *Ladder) Advance(z *Point, t float64) {
	var next Point
	for i := range l.rungs {
		m := &l.rungs[i]
		if t >= m.time {
			m.apply(&next, z, &l.System)
			*z = next
			t -= m.time
		}
	}
	if t > 0 {
		var terms series
		l.expand(&terms, z, t)
		terms.sum(z, 1, l.System.N, l.System.M, t, &l.System.Rate)
	}
}

// series holds the Taylor terms of a point over the time t: z, A z t, ...
type series [restTerms + 1]Point

func (l *Ladder) expand(terms *series, z *Point, t float64) {
	s := &l.System
	n, w := s.N, s.N+s.M
	terms[0] = *z
	times(terms[1][:n], s.A[:], z[:w], w)
	for i := range terms[1][:n] {
		terms[1][i] *= t
	}
	for p := 2; p <= restTerms; p++ {
		x := terms[p][:n]
		times(x, s.A[:], terms[p-1][:n], w)
		if p == 2 {
			for i := range x {
				for k := 0; k < s.M-1; k++ {
					x[i] += s.A[i*w+n+k] * s.Rate[k] * t
				}
			}
		}
		f := t / float64(p)
		for i := range x {
			x[i] *= f
		}
	}
}

// sum sets z to the point at the fraction r of the time t of the expansion.
func (terms *series) sum(z *Point, r float64, n, m int, t float64, rate *[MaxInputs]float64) {
	for i := 0; i < n; i++ {
		x := terms[restTerms][i]
		for p := restTerms - 1; p >= 0; p-- {
			x = terms[p][i] + float64(r*x)
		}
		z[i] = x
	}
	for k := 0; k < m; k++ {
		z[n+k] = terms[0][n+k] + float64(rate[k]*t*r)
	}
}
