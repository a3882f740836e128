// Package statespace advances linear systems with constant or steadily ramping
// inputs exactly, and finds where a linear output of such a system crosses zero.
// It knows matrices only; what a state means is decided by its callers.
//
// A point z holds N states followed by M inputs, of which the last is the
// constant 1. The states obey x' = A x + B u, the inputs u' = Rate, so the state
// after a time t is an affine function of the point: a Map.
package statespace

const (
	MaxStates = 32                    // [1]
	MaxInputs = 4                     // [1]
	Width     = MaxStates + MaxInputs // [1] length of the longest point
)

// Point is a state followed by the inputs.
type Point [Width]float64

// System is x' = A x + B u with ramping inputs.
type System struct {
	N, M int
	A    [MaxStates * Width]float64 // [any] row by row, N rows of N+M: [A B]
	Rate [MaxInputs]float64         // [any/s] of each input; that of the constant is 0
}

// Reset makes s the zero system of n states and m inputs.
func (s *System) Reset(n, m int) {
	s.N, s.M = n, m
	clear(s.A[:n*(n+m)])
	s.Rate = [MaxInputs]float64{}
}

// Row returns row i of [A B].
func (s *System) Row(i int) []float64 {
	w := s.N + s.M
	return s.A[i*w : i*w+w]
}

// Derivative sets dx[:N] to the derivative of the states at z.
func (s *System) Derivative(dx, z *Point) {
	w := s.N + s.M
	times(dx[:s.N], s.A[:], z[:w], w)
}

// Second sets dx[:N] to the second derivative of the states, given the first in d.
func (s *System) Second(dx, d *Point) {
	w := s.N + s.M
	for i := 0; i < s.N; i++ {
		row := s.A[i*w : i*w+w]
		sum := dot(row[:s.N], d[:s.N])
		for k := 0; k < s.M; k++ {
			sum += row[s.N+k] * s.Rate[k]
		}
		dx[i] = sum
	}
}

// dot is the scalar product.
func dot(a, b []float64) float64 {
	b = b[:len(a)]
	sum := 0.0
	for i, x := range a {
		sum += float64(x * b[i])
	}
	return sum
}

// Times sets dst to the values of as many functionals, whose rows of w entries
// follow one another in f, at a point.
func Times(dst, f []float64, z *Point, w int) { times(dst, f, z[:w], w) }

// times sets dst to the product of a matrix, whose rows begin stride apart in f,
// with z. Three rows at a time share the reading of z and let their sums overlap:
// 24 ns against 61 ns for six rows of ten, one after the other.
func times(dst, f, z []float64, stride int) {
	i := 0
	for ; i+2 < len(dst); i += 3 {
		r0, r1, r2 := f[i*stride:][:len(z)], f[(i+1)*stride:][:len(z)], f[(i+2)*stride:][:len(z)]
		var a, b, c float64
		for j, x := range z {
			a += float64(r0[j] * x)
			b += float64(r1[j] * x)
			c += float64(r2[j] * x)
		}
		dst[i], dst[i+1], dst[i+2] = a, b, c
	}
	for ; i < len(dst); i++ {
		dst[i] = dot(f[i*stride:][:len(z)], z)
	}
}

// Functional is a linear function of a point: the sum of Row[i] z[i].
type Functional [Width]float64

// At returns the functional's value at z, of which n entries are used.
func (f *Functional) At(z *Point, n int) float64 { return dot(f[:n], z[:n]) }

// Slope returns the rate of change of the functional, given the derivative of
// the states and the rates of the inputs.
func (f *Functional) Slope(s *System, dx *Point) float64 {
	sum := dot(f[:s.N], dx[:s.N])
	for k := 0; k < s.M; k++ {
		sum += f[s.N+k] * s.Rate[k]
	}
	return sum
}
