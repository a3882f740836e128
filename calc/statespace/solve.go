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

// Complex is a square complex matrix of up to MaxStates rows with its triangular
// factors, row by row with stride N.
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
		if p != k {
			for j := 0; j < n; j++ {
				m.A[p*n+j], m.A[k*n+j] = m.A[k*n+j], m.A[p*n+j]
			}
		}
		inverse := reciprocal(m.A[k*n+k])
		for i := k + 1; i < n; i++ {
			if m.A[i*n+k] == 0 {
				continue
			}
			f := m.A[i*n+k] * inverse
			m.A[i*n+k] = f
			for j := k + 1; j < n; j++ {
				m.A[i*n+j] -= f * m.A[k*n+j]
			}
		}
	}
	return true
}

// Solve replaces b[:N] by the solution of M x = b, after Factor.
func (m *Complex) Solve(b *ComplexPoint) {
	n := m.N
	for k := 0; k < n; k++ {
		p := m.pivot[k]
		b[p], b[k] = b[k], b[p]
	}
	for i := 1; i < n; i++ {
		for j := 0; j < i; j++ {
			b[i] -= m.A[i*n+j] * b[j]
		}
	}
	for i := n - 1; i >= 0; i-- {
		for j := i + 1; j < n; j++ {
			b[i] -= m.A[i*n+j] * b[j]
		}
		b[i] /= m.A[i*n+i]
	}
}

// SolveTransposed replaces b[:N] by the solution of x M = b, after Factor.
func (m *Complex) SolveTransposed(b *ComplexPoint) {
	n := m.N
	for i := 0; i < n; i++ {
		for j := 0; j < i; j++ {
			b[i] -= m.A[j*n+i] * b[j]
		}
		b[i] /= m.A[i*n+i]
	}
	for i := n - 2; i >= 0; i-- {
		for j := i + 1; j < n; j++ {
			b[i] -= m.A[j*n+i] * b[j]
		}
	}
	for k := n - 1; k >= 0; k-- {
		p := m.pivot[k]
		b[p], b[k] = b[k], b[p]
	}
}

// size is a cheap norm of a complex number.
func size(x complex128) float64 { return math.Abs(real(x)) + math.Abs(imag(x)) }
