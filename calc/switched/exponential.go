package switched

import "math"

const (
	maxTerms  = 20 // of a Taylor series
	maxLevels = 40 // doublings; a rate of 2^40 per interval is beyond any part
)

// inverse[k] = 1/k, so that series need no division.
var inverse = func() (r [2*maxTerms + 2]float64) {
	for k := 1; k < len(r); k++ {
		r[k] = 1 / float64(k)
	}
	return r
}()

// terms returns how many terms of Σ θ^k/(k+1)! leave a remainder below 1e-17 of
// the first, for θ ≤ 1.
func terms(theta float64) int {
	bound := 1.0
	for k := 1; k < maxTerms; k++ {
		bound *= theta * inverse[k+1]
		if bound < 1e-17 {
			return k
		}
	}
	return maxTerms
}

// square is a matrix with as many rows as the circuit has states, row by row
// without gaps.
type square [maxStates * maxStates]float64

// ladder holds the interval map over h, 2h, 4h ... up to the whole interval:
//
//	ξ(τ + h_l) = ξ(τ) + F_l ξ(τ) + d_l,  F = exp(A h) − I,  d = ∫0^h exp(A τ) b dτ
//
// The first rung is the series of φ1 for |A| h ≤ 1/16; each next one follows by
// F → 2F + F², d → 2d + F d. Working with F instead of exp(A h) keeps the slow
// modes to full relative accuracy beside stiff ones.
type ladder struct {
	owner  int // interval for which the rungs were built, −1 for none
	levels int // the whole interval is h_0 2^levels
	cell   int // greatest rung that a Taylor cell can span, |A| h ≤ 1/2
	norm   float64
	a      square // A h_0
	h      [maxLevels + 1]float64
	f      [maxLevels + 1]square
	d      [maxLevels + 1]vec
}

// firstRung is the reach of the series that starts the ladder, of degree 7 in
// φ1: (1/16)^8/9! = 6e-16.
const firstRung = 1. / 16

// build fills the rungs for an interval of length t. It reports false when the
// circuit is stiffer than maxLevels allows.
func (ld *ladder) build(s *scratch, nw *network, tp *topology, t float64) bool {
	theta := tp.norm * t
	ld.levels = 0
	if !(theta <= firstRung) {
		if !(theta < math.MaxFloat64) {
			return false
		}
		_, exponent := math.Frexp(theta / firstRung)
		if exponent > maxLevels {
			return false
		}
		ld.levels = exponent
	}
	ld.cell = min(ld.levels, 3)
	ld.norm = tp.norm
	h := math.Ldexp(t, -ld.levels)
	ld.h[0] = h
	n := nw.n
	ld.first(s, nw, tp, h)
	for l := range ld.levels {
		ld.h[l+1] = 2 * ld.h[l]
		f, g := &ld.f[l], &ld.f[l+1]
		multiply(g, f, f, n)
		addTwice(g, f, n)
		d, e := &ld.d[l], &ld.d[l+1]
		apply(f, d, e, n)
		for i := range n {
			e[i] += 2 * d[i]
		}
	}
	return true
}

// scratch is work space of the matrix functions.
type scratch struct{ b2, b3, p, q square }

// first fills the lowest rung, with B = A h:
//
//	φ1(B) = I + B/2 + B²/6 + B³/24 + B⁴ (I/5! + B/6! + B²/7! + B³/8!),  F = B φ1
func (ld *ladder) first(s *scratch, nw *network, tp *topology, h float64) {
	n := nw.n
	b, b2, b3 := &ld.a, &s.b2, &s.b3
	tp.matrix(nw, h, b)
	multiply(b2, b, b, n)
	multiply(b3, b2, b, n)
	p, q := s.p[:n*n], s.q[:n*n]
	for i := range p {
		x, y, z := b[i], b2[i], b3[i]
		q[i] = x*(1./720) + y*(1./5040) + z*(1./40320)
	}
	for i := range n {
		q[i*n+i] += 1. / 120
	}
	f := &ld.f[0]
	multiply(f, b, &s.q, n)
	multiply(&s.p, b3, f, n)
	for i := range p {
		p[i] += b[i]*(1./2) + b2[i]*(1./6) + b3[i]*(1./24)
	}
	for i := range n {
		p[i*n+i]++
	}
	multiply(f, b, &s.p, n)
	var y vec
	for i := range n {
		y[i] = tp.b[i] * h
	}
	apply(&s.p, &y, &ld.d[0], n)
}

// matrix writes A h. A phase at rest has neither row nor column.
func (tp *topology) matrix(nw *network, h float64, b *square) {
	n, phases := nw.n, nw.phases
	for p := range phases {
		row := b[p*n : p*n+n]
		hl := -h * tp.invL[p]
		for q := range phases {
			row[q] = nw.rho * hl
			if tp.pos[q] == resting {
				row[q] = 0
			}
		}
		row[p] += tp.r[p] * hl
		for k := range nw.banks {
			row[phases+k] = nw.couple[k] * hl
		}
		for k := phases + nw.banks; k < n; k++ {
			row[k] = 0
		}
	}
	for k := range nw.banks {
		row := b[(phases+k)*n : (phases+k)*n+n]
		for q := range phases {
			row[q] = nw.inject[k] * h
			if tp.pos[q] == resting {
				row[q] = 0
			}
		}
		for j := range nw.banks {
			row[phases+j] = nw.relax[k][j] * h
		}
		for j := phases + nw.banks; j < n; j++ {
			row[j] = 0
		}
	}
	if nw.input.banks > 0 {
		nw.input.matrix(nw, tp, h, b)
	}
}

// step writes the state h_l later. dst may be x.
func (ld *ladder) step(l int, x, dst *vec, n int) {
	var y vec
	apply(&ld.f[l], x, &y, n)
	for i := range n {
		dst[i] = x[i] + (y[i] + ld.d[l][i])
	}
}

// stepRate writes the rate h_l later. dst may be y.
func (ld *ladder) stepRate(l int, y, dst *vec, n int) {
	if n == 4 {
		m := (*[16]float64)(ld.f[l][:])
		a, b, c, d := y[0], y[1], y[2], y[3]
		dst[0] = a + (m[0]*a + m[1]*b + m[2]*c + m[3]*d)
		dst[1] = b + (m[4]*a + m[5]*b + m[6]*c + m[7]*d)
		dst[2] = c + (m[8]*a + m[9]*b + m[10]*c + m[11]*d)
		dst[3] = d + (m[12]*a + m[13]*b + m[14]*c + m[15]*d)
		return
	}
	var z vec
	apply(&ld.f[l], y, &z, n)
	for i := range n {
		dst[i] = y[i] + z[i]
	}
}

// solve overwrites x with the solution of a x = b and a with its elimination.
// Rows are scaled by their largest entry before a pivot is chosen, for currents
// and voltages have different units. It reports false for a singular matrix.
func solve(a *square, pivot *[maxStates]int, x *vec, n int) bool {
	var scale vec
	for i := range n {
		big := 0.0
		for _, v := range a[i*n : i*n+n] {
			big = max(big, math.Abs(v))
		}
		if !(big > 0 && big < math.MaxFloat64) {
			return false
		}
		scale[i] = 1 / big
	}
	for k := range n {
		best, at := -1.0, k
		for i := k; i < n; i++ {
			if v := math.Abs(a[i*n+k]) * scale[i]; v > best {
				best, at = v, i
			}
		}
		if !(best > 0) {
			return false
		}
		pivot[k] = at
		if at != k {
			for j := range n {
				a[k*n+j], a[at*n+j] = a[at*n+j], a[k*n+j]
			}
			scale[k], scale[at] = scale[at], scale[k]
		}
		q := 1 / a[k*n+k]
		for i := k + 1; i < n; i++ {
			m := a[i*n+k] * q
			a[i*n+k] = m
			for j := k + 1; j < n; j++ {
				a[i*n+j] -= m * a[k*n+j]
			}
		}
	}
	substitute(a, pivot, x, n)
	return true
}

// substitute solves with an elimination left by solve.
func substitute(a *square, pivot *[maxStates]int, x *vec, n int) {
	for k := range n {
		at := pivot[k]
		x[k], x[at] = x[at], x[k]
	}
	for i := range n {
		acc := x[i]
		for j := range i {
			acc -= a[i*n+j] * x[j]
		}
		x[i] = acc
	}
	for i := n - 1; i >= 0; i-- {
		acc := x[i]
		for j := i + 1; j < n; j++ {
			acc -= a[i*n+j] * x[j]
		}
		x[i] = acc / a[i*n+i]
	}
}
