package statespace

import "math"

// Real is a square matrix of up to Width rows, row by row with stride N.
type Real struct {
	N int
	A [Width * Width]float64 // [any]
}

// At returns the element in row i, column j.
func (m *Real) At(i, j int) float64 { return m.A[i*m.N+j] }

// Set puts x into row i, column j.
func (m *Real) Set(i, j int, x float64) { m.A[i*m.N+j] = x }

// Solve replaces b[:N] by the solution of M x = b, by elimination with partial
// pivoting; M is destroyed. It reports false for a singular matrix.
func (m *Real) Solve(b *Point) bool {
	n := m.N
	for k := 0; k < n; k++ {
		p := k
		for i := k + 1; i < n; i++ {
			if math.Abs(m.A[i*n+k]) > math.Abs(m.A[p*n+k]) {
				p = i
			}
		}
		if m.A[p*n+k] == 0 {
			return false
		}
		if p != k {
			for j := k; j < n; j++ {
				m.A[p*n+j], m.A[k*n+j] = m.A[k*n+j], m.A[p*n+j]
			}
			b[p], b[k] = b[k], b[p]
		}
		for i := k + 1; i < n; i++ {
			f := m.A[i*n+k] / m.A[k*n+k]
			if f == 0 {
				continue
			}
			for j := k + 1; j < n; j++ {
				m.A[i*n+j] -= float64(f * m.A[k*n+j])
			}
			b[i] -= float64(f * b[k])
		}
	}
	for i := n - 1; i >= 0; i-- {
		for j := i + 1; j < n; j++ {
			b[i] -= float64(m.A[i*n+j] * b[j])
		}
		b[i] /= m.A[i*n+i]
	}
	return true
}

// ComplexPoint is a complex state.
type ComplexPoint [MaxStates]complex128

// Complex is a square complex matrix of up to MaxStates rows and then its
// triangular factors, row by row with stride N; the factors' diagonal holds the
// reciprocals of the pivots.
type Complex struct {
	N     int
	A     [MaxStates * MaxStates]complex128 // [any]
	pivot [MaxStates]int
}

// Factor replaces the matrix by its triangular factors. It reports false for a
// singular matrix.
func (m *Complex) Factor() bool {
	n := m.N
	for k := 0; k < n; k++ {
		p := k
		for i := k + 1; i < n; i++ {
			if size(m.A[i*n+k]) > size(m.A[p*n+k]) {
				p = i
			}
		}
		m.pivot[k] = p
		if m.A[p*n+k] == 0 {
			return false
		}
		upper := m.A[k*n : k*n+n]
		if p != k {
			other := m.A[p*n : p*n+n]
			for j := range upper {
				upper[j], other[j] = other[j], upper[j]
			}
		}
		upper[k] = reciprocal(upper[k])
		for i := k + 1; i < n; i++ {
			row := m.A[i*n : i*n+n]
			if row[k] == 0 {
				continue
			}
			row[k] *= upper[k]
			subtract(row[k+1:], upper[k+1:], row[k])
		}
	}
	return true
}

// subtract takes f times b from a.
func subtract(a, b []complex128, f complex128) {
	b = b[:len(a)]
	re, im := real(f), imag(f)
	for j, y := range b {
		a[j] -= complex(float64(re*real(y))-float64(im*imag(y)), float64(re*imag(y))+float64(im*real(y)))
	}
}

// Solve replaces b[:N] by the solution of M x = b, after Factor.
func (m *Complex) Solve(b *ComplexPoint) {
	n := m.N
	for k := 0; k < n; k++ {
		p := m.pivot[k]
		b[p], b[k] = b[k], b[p]
	}
	for i := 1; i < n; i++ {
		b[i] -= product(m.A[i*n:i*n+i], b[:i])
	}
	for i := n - 1; i >= 0; i-- {
		b[i] = (b[i] - product(m.A[i*n+i+1:i*n+n], b[i+1:n])) * m.A[i*n+i]
	}
}

// product is the scalar product without conjugation.
func product(a, b []complex128) complex128 {
	b = b[:len(a)]
	var re, im float64
	for i, x := range a {
		y := b[i]
		re += float64(real(x)*real(y)) - float64(imag(x)*imag(y))
		im += float64(real(x)*imag(y)) + float64(imag(x)*real(y))
	}
	return complex(re, im)
}

// SolveTransposed replaces b[:N] by the solution of x M = b, after Factor.
func (m *Complex) SolveTransposed(b *ComplexPoint) {
	n := m.N
	for i := 0; i < n; i++ {
		b[i] *= m.A[i*n+i]
		subtract(b[i+1:n], m.A[i*n+i+1:i*n+n], b[i])
	}
	for i := n - 1; i > 0; i-- {
		subtract(b[:i], m.A[i*n:i*n+i], b[i])
	}
	for k := n - 1; k >= 0; k-- {
		p := m.pivot[k]
		b[p], b[k] = b[k], b[p]
	}
}

// size is a cheap norm of a complex number.
func size(x complex128) float64 { return math.Abs(real(x)) + math.Abs(imag(x)) }
