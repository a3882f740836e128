package statespace

import (
	"math"
	"math/cmplx"
)

// Transfer is the scalar transfer function Row (zI - M)^-1 Column of a discrete
// system, reduced to Hessenberg form so that one evaluation takes of the order of
// n^2 operations.
type Transfer struct {
	N      int
	h      [MaxStates * MaxStates]float64
	row    [MaxStates]float64
	column [MaxStates]float64
	work   [MaxStates * MaxStates]complex128
	side   ComplexPoint
}

// Reduce sets t to the transfer function of m with the given input column and
// output row, by Householder reflections. Further columns and rows are taken into the
// coordinates in which Solve works.
func (t *Transfer) Reduce(m *Real, column, row *Point, further ...Point) {
	n := m.N
	t.N = n
	copy(t.h[:n*n], m.A[:n*n])
	copy(t.column[:n], column[:n])
	copy(t.row[:n], row[:n])
	for k := 0; k < n-2; k++ {
		t.reflect(k, further)
	}
}

// reflect clears column k below the first subdiagonal.
func (t *Transfer) reflect(k int, further []Point) {
	n := t.N
	var v [MaxStates]float64
	norm := 0.0
	for i := k + 1; i < n; i++ {
		v[i] = t.h[i*n+k]
		norm = math.Hypot(norm, v[i])
	}
	if norm == 0 {
		return
	}
	if v[k+1] > 0 {
		norm = -norm
	}
	v[k+1] -= norm
	square := 0.0
	for i := k + 1; i < n; i++ {
		square += v[i] * v[i]
	}
	if square == 0 {
		return
	}
	for j := 0; j < n; j++ {
		s := 0.0
		for i := k + 1; i < n; i++ {
			s += v[i] * t.h[i*n+j]
		}
		s *= 2 / square
		for i := k + 1; i < n; i++ {
			t.h[i*n+j] -= s * v[i]
		}
	}
	for i := 0; i < n; i++ {
		reflectRow(t.h[i*n:i*n+n], &v, square, k+1)
	}
	reflectRow(t.row[:n], &v, square, k+1)
	reflectRow(t.column[:n], &v, square, k+1)
	for i := range further {
		reflectRow(further[i][:n], &v, square, k+1)
	}
	for i := k + 2; i < n; i++ {
		t.h[i*n+k] = 0
	}
}

func reflectRow(a []float64, v *[MaxStates]float64, square float64, from int) {
	s := 0.0
	for j := from; j < len(a); j++ {
		s += a[j] * v[j]
	}
	s *= 2 / square
	for j := from; j < len(a); j++ {
		a[j] -= s * v[j]
	}
}

// At returns the transfer function at z.
func (t *Transfer) At(z complex128) complex128 {
	b := &t.side
	for i, x := range t.column[:t.N] {
		b[i] = complex(x, 0)
	}
	t.Solve(z, b)
	sum := complex128(0)
	for i, x := range t.row[:t.N] {
		sum += complex(x*real(b[i]), x*imag(b[i]))
	}
	return sum
}

// Solve replaces b by (zI - M)^-1 b, both in the coordinates of the reduced form, by
// elimination with row exchanges.
func (t *Transfer) Solve(z complex128, b *ComplexPoint) {
	n := t.N
	a := t.work[:n*n]
	for i := 0; i < n; i++ {
		for j := max(0, i-1); j < n; j++ {
			a[i*n+j] = complex(-t.h[i*n+j], 0)
		}
		a[i*n+i] += z
	}
	for k := 0; k < n-1; k++ {
		upper, lower := a[k*n:k*n+n], a[k*n+n:k*n+2*n]
		if size(lower[k]) > size(upper[k]) {
			for j := k; j < n; j++ {
				upper[j], lower[j] = lower[j], upper[j]
			}
			b[k], b[k+1] = b[k+1], b[k]
		}
		if lower[k] == 0 {
			continue
		}
		f := lower[k] * reciprocal(upper[k])
		subtract(lower[k+1:], upper[k+1:], f)
		b[k+1] -= f * b[k]
	}
	for i := n - 1; i >= 0; i-- {
		x := b[i] - product(a[i*n+i+1:i*n+n], b[i+1:n])
		b[i] = x * reciprocal(a[i*n+i])
	}
}

// reciprocal is 1/x for a number whose square neither over- nor underflows.
func reciprocal(x complex128) complex128 {
	d := real(x)*real(x) + imag(x)*imag(x)
	return complex(real(x)/d, -imag(x)/d)
}

// Eigenvalues sets dst[:N] to the eigenvalues of the reduced matrix, in the order
// in which they are found, by single-shift QR iteration on the complex Hessenberg
// form. It reports false if an eigenvalue does not settle.
// Method: J. H. Wilkinson, The Algebraic Eigenvalue Problem, 1965, chapter 8
// (remembered, unverified).
func (t *Transfer) Eigenvalues(dst *ComplexPoint) bool {
	n := t.N
	var a [MaxStates][MaxStates]complex128
	for i := 0; i < n; i++ {
		for j := max(0, i-1); j < n; j++ {
			a[i][j] = complex(t.h[i*n+j], 0)
		}
	}
	iterations := 0
	for hi := n - 1; hi >= 0; {
		lo := hi
		for lo > 0 {
			if size(a[lo][lo-1]) <= deflation*(size(a[lo][lo])+size(a[lo-1][lo-1])) {
				a[lo][lo-1] = 0
				break
			}
			lo--
		}
		if lo == hi {
			dst[hi] = a[hi][hi]
			hi--
			iterations = 0
			continue
		}
		iterations++
		if iterations > eigenIterations {
			return false
		}
		shift := wilkinsonShift(a[hi-1][hi-1], a[hi-1][hi], a[hi][hi-1], a[hi][hi])
		if iterations%10 == 0 {
			shift = complex(size(a[hi][hi-1]), 0)
		}
		qrStep(&a, lo, hi, shift)
	}
	return true
}

const (
	deflation       = 1e-16 // [1] a subdiagonal this small against its neighbours is rounding
	eigenIterations = 100   // [1] per eigenvalue; three are usual
)

// wilkinsonShift returns the eigenvalue of [p q; r s] nearer to s.
func wilkinsonShift(p, q, r, s complex128) complex128 {
	half := (p - s) / 2
	root := cmplx.Sqrt(half*half + q*r)
	if real(half)*real(root)+imag(half)*imag(root) < 0 {
		root = -root
	}
	if half+root == 0 {
		return s
	}
	return s - q*r/(half+root)
}

// qrStep does one shifted QR step on rows and columns lo to hi.
func qrStep(a *[MaxStates][MaxStates]complex128, lo, hi int, shift complex128) {
	var c [MaxStates]float64
	var s [MaxStates]complex128
	for i := lo; i <= hi; i++ {
		a[i][i] -= shift
	}
	for k := lo; k < hi; k++ {
		x, y := a[k][k], a[k+1][k]
		r := math.Hypot(cmplx.Abs(x), cmplx.Abs(y))
		if r == 0 {
			c[k], s[k] = 1, 0
			continue
		}
		ax := cmplx.Abs(x)
		phase := complex128(1)
		if ax > 0 {
			phase = x / complex(ax, 0)
		}
		c[k] = ax / r
		s[k] = phase * cmplx.Conj(y) / complex(r, 0)
		for j := k; j <= hi; j++ {
			u, v := a[k][j], a[k+1][j]
			a[k][j] = complex(c[k], 0)*u + s[k]*v
			a[k+1][j] = -cmplx.Conj(s[k])*u + complex(c[k], 0)*v
		}
	}
	for k := lo; k < hi; k++ {
		for i := lo; i <= min(k+1, hi); i++ {
			u, v := a[i][k], a[i][k+1]
			a[i][k] = complex(c[k], 0)*u + cmplx.Conj(s[k])*v
			a[i][k+1] = -s[k]*u + complex(c[k], 0)*v
		}
	}
	for i := lo; i <= hi; i++ {
		a[i][i] += shift
	}
}
