package statespace

import (
	"math"
	"math/cmplx"
	"math/rand/v2"
	"testing"

	"github.com/stretchr/testify/require"
	"gonum.org/v1/gonum/mat"
)

// sample returns a random damped system; scale spreads its time constants.
func sample(r *rand.Rand, n, m int, scale float64) System {
	var s System
	s.Reset(n, m)
	for i := 0; i < n; i++ {
		row := s.Row(i)
		for j := range row {
			row[j] = r.NormFloat64() * 1e5
		}
		row[i] -= math.Pow(10, 5+scale*r.Float64())
	}
	for k := 0; k < m-1; k++ {
		s.Rate[k] = r.NormFloat64() * 1e4
	}
	return s
}

// augmented is the plain oracle: the exponential of the whole matrix.
func augmented(s *System, t float64) *mat.Dense {
	w := s.N + s.M
	a := mat.NewDense(w, w, nil)
	for i := 0; i < s.N; i++ {
		for j, x := range s.Row(i) {
			a.Set(i, j, x*t)
		}
	}
	for k := 0; k < s.M; k++ {
		a.Set(s.N+k, w-1, s.Rate[k]*t)
	}
	var e mat.Dense
	e.Exp(a)
	return &e
}

func start(r *rand.Rand, s *System) Point {
	var z Point
	for i := range z {
		z[i] = math.NaN()
	}
	for i := 0; i < s.N+s.M; i++ {
		z[i] = r.NormFloat64()
	}
	z[s.N+s.M-1] = 1
	return z
}

func TestExponentialAgainstGeneralMatrixExponential(t *testing.T) {
	r := rand.New(rand.NewPCG(1, 2))
	for _, n := range []int{1, 2, 3, 7, 13} {
		for _, time := range []float64{0, 1e-9, 3e-7, 2e-5} {
			s := sample(r, n, 3, 3)
			var m, work Map
			require.True(t, m.Exp(&s, time, &work))
			want := augmented(&s, time)
			for i := 0; i < n; i++ {
				for j := 0; j < n+3; j++ {
					got := m.F[i*(n+3)+j]
					require.InDelta(t, want.At(i, j), got, 1e-12*(1+math.Abs(want.At(i, j))), "n %d, t %g, element %d %d", n, time, i, j)
				}
			}
			require.Equal(t, time, m.Time)
		}
	}
}

func TestLadderReachesEveryTimeTheExponentialDoes(t *testing.T) {
	r := rand.New(rand.NewPCG(3, 4))
	for range 20 {
		s := sample(r, 6, 4, 4)
		const step = 1e-6
		l, ok := NewLadder(&s, step)
		require.True(t, ok)
		for _, fraction := range []float64{0, 1e-5, 0.1, 0.5, 0.77, 1} {
			z := start(r, &s)
			var m, work Map
			var want Point
			m.Exp(&s, fraction*step, &work)
			m.Apply(&want, &z)
			l.Advance(&z, fraction*step)
			for i := 0; i < s.N+s.M; i++ {
				// Squaring multiplies rounding by the norm of A t, here up to 1e4.
				require.InDelta(t, want[i], z[i], 1e-10*(1+math.Abs(want[i])))
			}
		}
	}
}

func TestCrossingLiesOnTheExactSolution(t *testing.T) {
	r := rand.New(rand.NewPCG(5, 6))
	found := 0
	for range 300 {
		s := sample(r, 5, 4, 3)
		const step = 1e-6
		l, ok := NewLadder(&s, step)
		require.True(t, ok)
		z := start(r, &s)
		e := Event{Offset: r.NormFloat64(), Ramp: 3e6 * r.Float64(), Curve: 1e12 * r.NormFloat64()}
		for i := 0; i < s.N+s.M; i++ {
			e.Output[i] = r.NormFloat64()
		}
		limit := step * (0.2 + 0.8*r.Float64())
		w := s.N + s.M
		end := z
		l.Advance(&end, limit)
		if !(e.At(&z, w, 0) < 0 && e.At(&end, w, limit) >= 0) {
			continue
		}
		found++
		begin := z
		at := l.Cross(&e, &z, limit)
		require.GreaterOrEqual(t, at, 0.0)
		require.LessOrEqual(t, at, limit)
		require.InDelta(t, 0, e.At(&z, w, at), 1e-10)
		l.Advance(&begin, at)
		for i := 0; i < w; i++ {
			require.InDelta(t, begin[i], z[i], 1e-11*(1+math.Abs(z[i])))
		}
	}
	require.Greater(t, found, 30)
}

func TestSecondDerivativeIsThatOfTheFirst(t *testing.T) {
	r := rand.New(rand.NewPCG(8, 8))
	s := sample(r, 4, 3, 1)
	l, _ := NewLadder(&s, 1e-6)
	z := start(r, &s)
	var d0, dd, d1 Point
	s.Derivative(&d0, &z)
	s.Second(&dd, &d0)
	const h = 1e-11
	l.Advance(&z, h)
	s.Derivative(&d1, &z)
	for i := 0; i < s.N; i++ {
		require.InEpsilon(t, dd[i], (d1[i]-d0[i])/h, 1e-3)
	}
}

func TestTransferAndEigenvaluesAgainstDenseSolve(t *testing.T) {
	r := rand.New(rand.NewPCG(7, 8))
	for _, n := range []int{1, 2, 3, 4, 7, 12, 20} {
		m := Real{N: n}
		var column, row Point
		plain := mat.NewDense(n, n, nil)
		for i := 0; i < n; i++ {
			column[i], row[i] = r.NormFloat64(), r.NormFloat64()
			for j := 0; j < n; j++ {
				x := r.NormFloat64()
				m.Set(i, j, x)
				plain.Set(i, j, x)
			}
		}
		var f Transfer
		f.Reduce(&m, &column, &row)
		for _, z := range []complex128{cmplx.Rect(1, 0.3), cmplx.Rect(1, 3), -1} {
			var c Complex
			var b, bt ComplexPoint
			c.N = n
			for i := 0; i < n; i++ {
				for j := 0; j < n; j++ {
					c.A[i*n+j] = complex(-m.At(i, j), 0)
				}
				c.A[i*n+i] += z
				b[i], bt[i] = complex(column[i], 0), complex(row[i], 0)
			}
			require.True(t, c.Factor())
			c.Solve(&b)
			c.SolveTransposed(&bt)
			var want, wantTransposed complex128
			for i := 0; i < n; i++ {
				want += complex(row[i], 0) * b[i]
				wantTransposed += complex(column[i], 0) * bt[i]
			}
			got := f.At(z)
			require.Less(t, cmplx.Abs(got-want), 1e-10*(1+cmplx.Abs(want)))
			require.Less(t, cmplx.Abs(wantTransposed-want), 1e-10*(1+cmplx.Abs(want)))
		}
		var e ComplexPoint
		require.True(t, f.Eigenvalues(&e))
		var oracle mat.Eigen
		require.True(t, oracle.Factorize(plain, mat.EigenNone)) //nolint:misspell // gonum calls it so
		for _, want := range oracle.Values(nil) {
			nearest := math.Inf(1)
			for _, got := range e[:n] {
				nearest = min(nearest, cmplx.Abs(got-want))
			}
			require.Less(t, nearest, 1e-9*(1+cmplx.Abs(want)), "n %d eigenvalue %v", n, want)
		}
	}
}

func TestTooStiffSystemsAreRefused(t *testing.T) {
	var s System
	s.Reset(1, 1)
	s.Row(0)[0] = -1e18
	var m, work Map
	require.False(t, m.Exp(&s, 1e-6, &work))
	_, ok := NewLadder(&s, 1e-6)
	require.False(t, ok)
	s.Row(0)[0] = math.Inf(-1)
	require.False(t, m.Exp(&s, 1e-6, &work))
}

func TestSingularMatrixIsRefused(t *testing.T) {
	m := Real{N: 2}
	m.Set(0, 0, 1)
	m.Set(1, 0, 2)
	var b Point
	require.False(t, m.Solve(&b))
	c := Complex{N: 2}
	c.A[0] = 1
	require.False(t, c.Factor())
}

func TestAdvancingAllocatesNothing(t *testing.T) {
	r := rand.New(rand.NewPCG(1, 1))
	s := sample(r, 7, 4, 3)
	l, _ := NewLadder(&s, 1e-6)
	z := start(r, &s)
	var m, work Map
	require.Zero(t, testing.AllocsPerRun(20, func() {
		l.Advance(&z, 7e-7)
		m.Exp(&s, 1e-6, &work)
	}))
}

func BenchmarkSeven(b *testing.B) {
	r := rand.New(rand.NewPCG(1, 1))
	s := sample(r, 7, 4, 3)
	l, _ := NewLadder(&s, 1e-7)
	z := start(r, &s)
	b.Run("exponential", func(b *testing.B) {
		var m, work Map
		for b.Loop() {
			m.Exp(&s, 1e-6, &work)
		}
	})
	b.Run("whole", func(b *testing.B) {
		var d Point
		for b.Loop() {
			l.Whole(&d, &z)
		}
	})
	b.Run("advance", func(b *testing.B) {
		for b.Loop() {
			p := z
			l.Advance(&p, 7e-8)
		}
	})
	b.Run("transfer", func(b *testing.B) {
		m := Real{N: 7}
		copy(m.A[:49], s.A[:49])
		var f Transfer
		f.Reduce(&m, &z, &z)
		for b.Loop() {
			f.At(1i)
		}
	})
	b.Run("eigenvalues", func(b *testing.B) {
		m := Real{N: 7}
		copy(m.A[:49], s.A[:49])
		var f Transfer
		var e ComplexPoint
		f.Reduce(&m, &z, &z)
		for b.Loop() {
			f.Eigenvalues(&e)
		}
	})
}
