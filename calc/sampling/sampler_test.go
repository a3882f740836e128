package sampling

import (
	"fmt"
	"math"
	"testing"

	"github.com/stretchr/testify/assert"
	"github.com/stretchr/testify/require"
)

var methods = map[string]Method{"independent": Independent, "sobol": Sobol, "latin-hypercube": LatinHypercube}

func TestSampleAskedForAloneIsTheSame(t *testing.T) {
	for name, m := range methods {
		s, err := New(Design{m, 7, 23, 1000})
		require.NoError(t, err)
		all := make([][]float64, s.Samples())
		inOrder := s.Cursor()
		for k := range all {
			all[k] = make([]float64, 23)
			inOrder.Point(k, all[k])
		}
		u := make([]float64, 23)
		for k := s.Samples() - 1; k >= 0; k -= 7 {
			s.Cursor().Point(k, u)
			assert.Equal(t, all[k], u, "%s sample %d by a fresh cursor", name, k)
		}
		back := s.Cursor()
		for k := s.Samples() - 1; k >= 0; k-- {
			back.Point(k, u)
			require.Equal(t, all[k], u, "%s sample %d backwards", name, k)
		}
	}
}

func TestSeedsDiffer(t *testing.T) {
	for name, m := range methods {
		a, _ := New(Design{m, 1, 4, 1000})
		b, _ := New(Design{m, 2, 4, 1000})
		u, v := make([]float64, 4), make([]float64, 4)
		for k := range 100 {
			a.Cursor().Point(k, u)
			b.Cursor().Point(k, v)
			assert.NotEqual(t, u, v, "%s sample %d", name, k)
		}
	}
}

func TestSamplesAreNeverFewerThanAsked(t *testing.T) {
	for name, m := range methods {
		for _, n := range []int{1, 2, 100, 129, 5000, 1_000_000} {
			s, err := New(Design{m, 1, 3, n})
			require.NoError(t, err)
			assert.GreaterOrEqual(t, s.Samples(), n, name)
			assert.Equal(t, s.Samples(), s.Replicates()*s.PerReplicate(), name)
		}
	}
	_, err := New(Design{Independent, 1, 3, 0})
	assert.Error(t, err)
}

// chiSquare returns the statistic of counts against equal expectation, as a
// standard normal score (Wilson-Hilferty).
func chiSquare(counts []int, n int) float64 {
	expected, x := float64(n)/float64(len(counts)), 0.0
	for _, c := range counts {
		d := float64(c) - expected
		x += d * d / expected
	}
	df := float64(len(counts) - 1)
	return (math.Cbrt(x/df) - (1 - 2/(9*df))) / math.Sqrt(2/(9*df))
}

// Independent samples pass frequency tests along coordinates, along samples, for
// neighbouring pairs of both, and for neighbouring seeds. Five sigma over a few
// dozen fixed tests: a sound generator fails none of them.
func TestIndependentSamplesLookIndependent(t *testing.T) {
	const n, k, cells = 20000, 12, 16
	for _, seed := range []uint64{0, 1, 2, 1 << 52} {
		s, _ := New(Design{Independent, seed, k, n})
		next, _ := New(Design{Independent, seed + 1, k, n})
		c, d := s.Cursor(), next.Cursor()
		single := make([][]int, k)
		alongCoordinate, alongSample, alongSeed := make([]int, cells*cells), make([]int, cells*cells), make([]int, cells*cells)
		for j := range single {
			single[j] = make([]int, 256)
		}
		u, before, other := make([]float64, k), make([]float64, k), make([]float64, k)
		c.Point(n-1, before)
		for i := range n {
			c.Point(i, u)
			d.Point(i, other)
			for j, x := range u {
				require.True(t, x > 0 && x < 1)
				single[j][int(x*256)]++
				at := int(x * cells)
				alongSample[at*cells+int(before[j]*cells)]++
				alongSeed[at*cells+int(other[j]*cells)]++
				if j > 0 {
					alongCoordinate[at*cells+int(u[j-1]*cells)]++
				}
			}
			copy(before, u)
		}
		for j := range single {
			assert.InDelta(t, 0, chiSquare(single[j], n), 5, "seed %d coordinate %d", seed, j)
		}
		assert.InDelta(t, 0, chiSquare(alongCoordinate, n*(k-1)), 5, "seed %d pairs of coordinates", seed)
		assert.InDelta(t, 0, chiSquare(alongSample, n*k), 5, "seed %d pairs of samples", seed)
		assert.InDelta(t, 0, chiSquare(alongSeed, n*k), 5, "seed %d pairs of seeds", seed)
	}
}

func TestLatinHypercubeHasOnePointPerStratum(t *testing.T) {
	for _, n := range []int{1, 16 * 8, 16 * 9, 16 * 100, 16 * 1023, 16 * 1024} {
		s, err := New(Design{LatinHypercube, 3, 5, n})
		require.NoError(t, err)
		c, u := s.Cursor(), make([]float64, 5)
		per := s.PerReplicate()
		for r := range s.Replicates() {
			seen := make([]bool, 5*per)
			for i := range per {
				c.Point(r*per+i, u)
				for j, x := range u {
					at := int(x * float64(per))
					require.False(t, seen[j*per+at], "n %d replicate %d coordinate %d stratum %d twice", n, r, j, at)
					seen[j*per+at] = true
				}
			}
		}
	}
}

// The orders of two coordinates are unrelated: correlations over many replicates
// are those of chance, for small and large numbers of strata.
func TestLatinHypercubeOrdersAreUnrelated(t *testing.T) {
	for _, per := range []int{8, 11, 64, 1000} {
		sum, square, count := 0.0, 0.0, 0
		for seed := range uint64(40) {
			s, _ := New(Design{LatinHypercube, seed, 6, Replicates * per})
			c, u := s.Cursor(), make([]float64, 6)
			for r := range Replicates {
				var xy [5]float64
				for i := range per {
					c.Point(r*per+i, u)
					for j := range xy {
						xy[j] += 12 * (u[j] - 0.5) * (u[j+1] - 0.5)
					}
				}
				for _, v := range xy {
					rho := v / math.Sqrt(float64(per))
					sum, square, count = sum+rho, square+rho*rho, count+1
				}
			}
		}
		n := float64(count)
		assert.InDelta(t, 0, sum/math.Sqrt(n), 5, "%d strata: mean correlation in standard errors", per)
		assert.InDelta(t, 1, square/n, 0.2, "%d strata: variance of the correlation against chance", per)
	}
}

// On a smooth sum the balanced methods must beat independent samples by far.
func TestBalancedMethodsReduceVariance(t *testing.T) {
	spread := func(m Method) float64 {
		s, _ := New(Design{m, 5, 8, Replicates * 1024})
		c, u := s.Cursor(), make([]float64, 8)
		mean, square := 0.0, 0.0
		for r := range Replicates {
			y := 0.0
			for i := range 1024 {
				c.Point(r*1024%s.Samples()+i, u)
				for _, x := range u {
					y += (x*x*x - 0.25) / 1024
				}
			}
			mean, square = mean+y/Replicates, square+y*y/Replicates
		}
		return math.Sqrt(square - mean*mean)
	}
	plain := spread(Independent)
	assert.Less(t, spread(LatinHypercube), plain/50)
	assert.Less(t, spread(Sobol), plain/50)
}

func TestPointDoesNotAllocate(t *testing.T) {
	for name, m := range methods {
		s, _ := New(Design{m, 7, 20, 1000})
		c, u, k := s.Cursor(), make([]float64, 20), 0
		assert.Zero(t, testing.AllocsPerRun(100, func() { c.Point(k, u); k++ }), name)
	}
}

func BenchmarkPoint(b *testing.B) {
	for _, name := range []string{"independent", "sobol", "latin-hypercube"} {
		for _, k := range []int{15, 25} {
			b.Run(fmt.Sprintf("%s/%d", name, k), func(b *testing.B) {
				s, _ := New(Design{methods[name], 1, k, 1_000_000})
				c, u, i := s.Cursor(), make([]float64, k), 0
				for b.Loop() {
					c.Point(i, u)
					if i++; i == s.Samples() {
						i = 0
					}
				}
			})
		}
	}
}
