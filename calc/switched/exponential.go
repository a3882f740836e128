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
type square [MaxStates * MaxStates]float64

// ladder holds the interval map over h, 2h, 4h ... up to the whole interval:
//
//	ξ(τ + h_l) = ξ(τ) + F_l ξ(τ) + d_l,  F = exp(A h) − I,  d = ∫0^h exp(A τ) b dτ
//
// The first rung is a Taylor series for |A| h ≤ 1; each next one follows by
// F → 2F + F², d → 2d + F d. Working with F instead of exp(A h) keeps the slow
// modes to full relative accuracy beside stiff ones.
type ladder struct {
	owner  int // interval for which the rungs were built, −1 for none
	levels int // the whole interval is h_0 2^levels
	terms  int
	h      [maxLevels + 1]float64
	f      [maxLevels + 1]square
	d      [maxLevels + 1]vec
}

// build fills the rungs for an interval of length t. It reports false when the
// circuit is stiffer than maxLevels allows.
func (ld *ladder) build(nw *network, tp *topology, t float64) bool {
	theta := tp.norm * t
	ld.levels = 0
	if !(theta <= 1) {
		ld.levels = int(math.Ceil(math.Log2(theta)))
		if !(theta < math.MaxFloat64) || ld.levels > maxLevels {
			ld.levels = 0
			return false
		}
	}
	h := math.Ldexp(t, -ld.levels)
	ld.h[0] = h
	ld.terms = terms(tp.norm * h)
	n := nw.n
	f := &ld.f[0]
	var unit, rate, column vec
	for j := range n {
		if j < nw.phases && tp.pos[j] == Resting {
			for i := range n {
				f[i*n+j] = 0
			}
			continue
		}
		unit[j] = 1
		tp.rate(nw, &unit, &rate)
		unit[j] = 0
		tp.displace(nw, &rate, h, ld.terms, &column)
		for i := range n {
			f[i*n+j] = column[i]
		}
	}
	tp.displace(nw, &tp.b, h, ld.terms, &ld.d[0])
	for l := range ld.levels {
		ld.h[l+1] = 2 * ld.h[l]
		f := &ld.f[l]
		multiply(&ld.f[l+1], f, f, n)
		for i := range n * n {
			ld.f[l+1][i] += 2 * f[i]
		}
		apply(f, &ld.d[l], &ld.d[l+1], n)
		for i := range n {
			ld.d[l+1][i] += 2 * ld.d[l][i]
		}
	}
	return true
}

// displace writes ∫0^h exp(Aτ) y dτ = h Σ (A h)^k y/(k+1)!, the way the state
// goes in h when it sets out at rate y.
func (tp *topology) displace(nw *network, y *vec, h float64, terms int, dst *vec) {
	var term, next vec
	for i := range nw.n {
		term[i] = y[i] * h
		dst[i] = term[i]
	}
	for k := 2; k <= terms+1; k++ {
		tp.rate(nw, &term, &next)
		q := h * inverse[k]
		for i := range nw.n {
			term[i] = next[i] * q
			dst[i] += term[i]
		}
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
	var z vec
	apply(&ld.f[l], y, &z, n)
	for i := range n {
		dst[i] = y[i] + z[i]
	}
}

// apply writes y = M x.
func apply(m *square, x, y *vec, n int) {
	for i := range n {
		row := m[i*n : i*n+n]
		acc := 0.0
		for j, a := range row {
			acc += a * x[j]
		}
		y[i] = acc
	}
}

// multiply writes dst = a b; dst is neither.
func multiply(dst, a, b *square, n int) {
	for i := range n {
		out := dst[i*n : i*n+n]
		left := a[i*n : i*n+n]
		x := left[0]
		for j, v := range b[:n] {
			out[j] = x * v
		}
		for k := 1; k < n; k++ {
			x := left[k]
			row := b[k*n : k*n+n]
			for j, v := range row {
				out[j] += x * v
			}
		}
	}
}

// solve overwrites x with the solution of a x = b and a with its elimination.
// Rows are scaled by their largest entry before a pivot is chosen, for currents
// and voltages have different units. It reports false for a singular matrix.
func solve(a *square, pivot *[MaxStates]int, x *vec, n int) bool {
	var scale vec
	for i := range n {
		big := 0.0
		for _, v := range a[i*n : i*n+n] {
			big = math.Max(big, math.Abs(v))
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
func substitute(a *square, pivot *[MaxStates]int, x *vec, n int) {
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
