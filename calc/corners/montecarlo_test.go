package corners

import (
	"fmt"
	"math"
	"runtime"
	"slices"
	"testing"

	"github.com/stretchr/testify/assert"
	"github.com/stretchr/testify/require"
	"gonum.org/v1/gonum/stat"

	"railproof/calc/evaluate"
	"railproof/calc/sampling"
	"railproof/calc/spread"
	"railproof/calc/switched"
)

// spreads returns a set of symmetric spreads of unit half width and the box over it.
func spreads(t testing.TB, n, conditions, quantities int, d spread.Distribution) (*spread.Set, *Problem) {
	v := make([]spread.Variable, n)
	for i := range v {
		v[i] = spread.Variable{Pointer: fmt.Sprint("/", i), Min: -1, Typ: 0, Max: 1, Distribution: d}
	}
	s, err := spread.New(v)
	require.NoError(t, err)
	p := box(n, conditions, quantities)
	for i := range n {
		p.Coordinates[i].Moments = s.Moments(i)
	}
	return s, p
}

func simulate(t testing.TB, p *Problem, set *spread.Set, m Model, plan Plan) *MonteCarlo {
	mc, err := NewMonteCarlo(p, set, plan)
	require.NoError(t, err)
	Run(mc, m)
	return mc
}

var sumModel = function(func(z, out []float64) {
	out[0] = 0
	for _, x := range z {
		out[0] += x
	}
})

// A sum of uniforms has known moments and, for three of them, a known distribution.
func TestSumsOfUniforms(t *testing.T) {
	set, p := spreads(t, 3, 0, 1, spread.Uniform)
	// P(sum of three uniforms on [-1, 1] > 2.5) = (0.5/2)^3 / 6
	tail := 0.25 * 0.25 * 0.25 / 6
	for name, method := range map[string]sampling.Method{"independent": sampling.Independent, "sobol": sampling.Sobol, "latin-hypercube": sampling.LatinHypercube} {
		mc := simulate(t, p, set, sumModel, Plan{
			Sampling: sampling.Design{Method: method, Seed: 3, Samples: 200000}, Corners: [][]float64{{0, 0, 0}},
			Limits: []Limit{{0, math.NaN(), 2.5}}, Worst: 3,
		})
		s := mc.Statistics(0, 0)
		require.Equal(t, mc.Units(), s.Units, name)
		e := s.MeanError(0.9999)
		assert.InDelta(t, 0, s.Mean, e, "%s mean", name)
		assert.Less(t, e, 0.01, name)
		assert.InDelta(t, 1, s.Deviation, 0.01, "%s: three variances of 1/3", name)
		for q, want := range map[float64]float64{tail: -2.5, 0.5: 0, 1 - tail: 2.5} {
			got := s.Quantile(q, 0.9999)
			assert.True(t, got.Low <= want && want <= got.High, "%s quantile %g: %+v", name, q, got)
			assert.Less(t, got.Error, 0.01, name)
			assert.Less(t, got.High-got.Low, 0.12, name)
		}
		y := mc.Yield(0.9999)
		assert.True(t, y.Low <= 1-tail && 1-tail <= y.High, "%s yield %+v", name, y)
		assert.Equal(t, method == sampling.Independent, y.Exact)
		assert.Equal(t, y.Units-y.Passes, mc.Broken(0))
		assert.Equal(t, y.Units-y.Passes, mc.Beyond(0, 0))
		w := mc.Worst(0)
		require.Len(t, w, 3)
		assert.Equal(t, s.Greatest, w[0].Value)
		z := mc.Sample(w[0].Sample, w[0].Corner)
		assert.Equal(t, w[0].Value, z[0]+z[1]+z[2], "%s: the worst sample asked for again", name)
	}
}

// Low-discrepancy and Latin samples must show their smaller error, not only have it.
func TestBalancedSamplesStateASmallerError(t *testing.T) {
	set, p := spreads(t, 5, 0, 1, spread.Normal)
	errorOf := func(m sampling.Method) float64 {
		mc := simulate(t, p, set, sumModel, Plan{Sampling: sampling.Design{Method: m, Seed: 1, Samples: 1 << 14}, Corners: [][]float64{make([]float64, 5)}})
		return mc.Statistics(0, 0).MeanError(0.95)
	}
	plain := errorOf(sampling.Independent)
	assert.Less(t, errorOf(sampling.Sobol), plain/30)
	assert.Less(t, errorOf(sampling.LatinHypercube), plain/30)
}

// On a linear model root-sum-square, its deviation and Monte Carlo agree with the
// closed form, for each distribution.
func TestLinearModelAgreesWithTheClosedForm(t *testing.T) {
	c := []float64{1, -0.5, 2, 0.25, -1.5}
	m := function(func(z, out []float64) {
		out[0] = 10
		for i := range c {
			out[0] += c[i] * z[i]
		}
	})
	sum := 0.0
	for _, x := range c {
		sum += x * x
	}
	// variance of a normal with sigma 1/3 truncated at 3 sigma: (1 - 6 phi(3)/(2 Phi(3) - 1)) / 9
	phi3 := math.Exp(-4.5) / math.Sqrt(2*math.Pi)
	for d, variance := range map[spread.Distribution]float64{spread.Uniform: 1.0 / 3, spread.Triangular: 1.0 / 6, spread.Normal: (1 - 6*phi3/math.Erf(3/math.Sqrt2)) / 9} {
		set, p := spreads(t, 5, 0, 1, d)
		r := linear(p, m)[0]
		assert.InEpsilon(t, math.Sqrt(sum), r.RandomAbove, 1e-9)
		assert.InEpsilon(t, math.Sqrt(sum*variance), r.Deviation, 1e-9, d)
		mc := simulate(t, p, set, m, Plan{Sampling: sampling.Design{Method: sampling.Sobol, Seed: 1, Samples: 1 << 16}, Corners: [][]float64{make([]float64, 5)}})
		s := mc.Statistics(0, 0)
		assert.InEpsilon(t, 10, s.Mean, 1e-6, d)
		assert.InEpsilon(t, r.Deviation, s.Deviation, 2e-4, d)
	}
}

// The sketch against the samples themselves, kept and sorted.
func TestSketchAgainstStoredSamples(t *testing.T) {
	set, p := spreads(t, 4, 0, 1, spread.Uniform)
	m := function(func(z, out []float64) { out[0] = math.Exp(z[0]+z[1]) + 100*z[2]*z[2]*z[2]*z[2]*z[2]*z[2] + z[3] })
	mc := simulate(t, p, set, m, Plan{Sampling: sampling.Design{Seed: 9, Samples: 30000}, Corners: [][]float64{make([]float64, 4)}})
	values := make([]float64, mc.Units())
	out := make([]float64, 1)
	for k := range values {
		m(mc.Sample(k, 0), out)
		values[k] = out[0]
	}
	mean, deviation := stat.MeanStdDev(values, nil)
	slices.Sort(values)
	s := mc.Statistics(0, 0)
	assert.InEpsilon(t, mean, s.Mean, 1e-7)
	assert.InEpsilon(t, deviation, s.Deviation, 1e-7)
	assert.Equal(t, values[0], s.Least)
	assert.Equal(t, values[len(values)-1], s.Greatest)
	assert.Zero(t, s.Far)
	for _, q := range []float64{0.00135, 0.01, 0.3, 0.5, 0.99, 0.99865} {
		got := s.Quantile(q, 0.95)
		want := values[int(math.Ceil(q*float64(len(values))))-1]
		assert.InDelta(t, want, got.Value, got.Error*1.0000001, "quantile %g", q)
		low, high := orderInterval(len(values), q, 0.95)
		assert.InDelta(t, values[low-1], got.Low, got.Error*1.5, "quantile %g low", q)
		assert.InDelta(t, values[high-1], got.High, got.Error*1.5, "quantile %g high", q)
	}
	bound, order := s.WilksBound(Greatest, 0.95, 0.95)
	assert.Equal(t, WilksOrder(30000, 0.95, 0.95), order)
	assert.GreaterOrEqual(t, bound, values[len(values)-order])
	assert.InDelta(t, values[len(values)-order], bound, 0.2)
	edges, counts, below, above := s.Histogram(40)
	total := below + above
	for i, n := range counts {
		total += n
		lo, _ := slices.BinarySearch(values, edges[i])
		hi, _ := slices.BinarySearch(values, edges[i+1])
		assert.InDelta(t, hi-lo, n, 1, "bin %d", i)
	}
	assert.Equal(t, 30000, total)
	assert.LessOrEqual(t, len(counts), 40)
	assert.Len(t, edges, len(counts)+1)
}

func TestOrderIntervalHoldsItsConfidence(t *testing.T) {
	// by hand: n = 16, p = 0.2; P(X <= 0) = 0.0281, P(X <= 6) = 0.9733 (Conover, example 3.2.1 figures recomputed)
	low, high := orderInterval(16, 0.2, 0.9)
	assert.Equal(t, 1, low, "P(X < 1) = 0.0281 <= 0.05 < P(X < 2)")
	assert.Equal(t, 7, high, "P(X >= 7) = 0.0267 <= 0.05 < P(X >= 6)")
	low, high = orderInterval(10, 0.001, 0.95)
	assert.Equal(t, 0, low, "too few samples for a lower bound")
	assert.LessOrEqual(t, high, 10)
}

// Two condition corners: quantiles apart, yield joint, a failure never a pass.
func TestYieldIsJointOverCorners(t *testing.T) {
	set, p := spreads(t, 1, 1, 1, spread.Uniform)
	m := staged(func(z, out []float64) (evaluate.Status, switched.Mode) {
		out[0] = z[0] * z[1]
		if z[0] > 0.8 && z[1] > 0 {
			out[0] = math.NaN()
			return evaluate.Runaway, 0
		}
		if z[0] < -0.9 {
			return evaluate.OverTemperature, 0
		}
		return evaluate.OK, 0
	})
	mc := simulate(t, p, set, m, Plan{
		Sampling: sampling.Design{Seed: 1, Samples: 100000}, Corners: [][]float64{{0, 1}, {0, -1}},
		Limits: []Limit{{0, math.NaN(), 0.5}}, Worst: 2,
	})
	// passes: z <= 0.5 at the first corner, -z <= 0.5 at the second; failing ends lie beyond anyway
	y := mc.Yield(0.9999)
	assert.True(t, y.Low < 0.5 && 0.5 < y.High, "%+v", y)
	assert.InDelta(t, 0.25, float64(mc.Beyond(0, 0))/1e5, 0.01)
	assert.InDelta(t, 0.25, float64(mc.Beyond(1, 0))/1e5, 0.01)
	assert.Equal(t, mc.Broken(0), mc.Beyond(0, 0)+mc.Beyond(1, 0), "no unit is beyond at both")
	first, second := mc.Statistics(0, 0), mc.Statistics(1, 0)
	assert.InDelta(t, 90000, first.Units, 1000, "runaway has no value")
	assert.Equal(t, 100000, second.Units, "an over-temperature has one")
	bound, order := first.WilksBound(Greatest, 0.95, 0.95)
	assert.True(t, math.IsNaN(bound) && order == 0, "samples without a value void the bound")
	f := mc.Failures()
	require.Len(t, f, 3)
	assert.Equal(t, evaluate.OverTemperature, f[0].Status)
	assert.Equal(t, evaluate.Runaway, f[1].Status)
	assert.Equal(t, 100000-first.Units, f[1].Count)
	assert.Equal(t, 1, f[2].Corner)
	z := mc.Sample(f[1].First, 0)
	assert.Greater(t, z[0], 0.8)
	for k := range f[1].First {
		require.LessOrEqual(t, mc.Sample(k, 0)[0], 0.8, "an earlier sample failed so")
	}
}

func TestRunIsTheSameOnAnyNumberOfWorkers(t *testing.T) {
	for _, method := range []sampling.Method{sampling.Independent, sampling.Sobol, sampling.LatinHypercube} {
		set, p := spreads(t, 6, 1, 2, spread.Normal)
		m := staged(func(z, out []float64) (evaluate.Status, switched.Mode) {
			out[0] = math.Sin(z[0]) + z[1]*z[2] + z[6]
			out[1] = math.Round(z[3]*4) + z[6]
			if z[4] > 0.7 {
				return evaluate.DropOut, 0
			}
			return evaluate.OK, 0
		})
		type answer struct {
			Statistics []Statistics
			Quantile   []Quantile
			Error      []float64
			Yield      Yield
			Worst      [][]WorstSample
			Failures   []FailureCount
			Broken     int
		}
		var want *answer
		for _, workers := range []int{1, 2, 7} {
			mc, err := NewMonteCarlo(p, set, Plan{
				Sampling: sampling.Design{Method: method, Seed: 4, Samples: 20011}, Corners: [][]float64{make([]float64, 7), {6: 1}, {6: -1}},
				Limits: []Limit{{0, -1, 1}, {1, math.NaN(), 2}}, Worst: 5, Workers: workers,
			})
			require.NoError(t, err)
			runWorkers(mc, m, workers)
			got := &answer{Yield: mc.Yield(0.95), Failures: mc.Failures(), Broken: mc.Broken(1)}
			for c := range 3 {
				for q := range 2 {
					s := mc.Statistics(c, q)
					got.Quantile = append(got.Quantile, s.Quantile(0.01, 0.95), s.Quantile(0.5, 0.95))
					got.Error = append(got.Error, s.MeanError(0.95))
					s.run = nil
					got.Statistics = append(got.Statistics, *s)
				}
			}
			for k := range p.Targets {
				got.Worst = append(got.Worst, mc.Worst(k))
			}
			if want == nil {
				want = got
			}
			require.Equal(t, want, got, "method %d, %d workers", method, workers)
		}
		ties := want.Worst[2]
		assert.Len(t, ties, 5)
		for i := 1; i < len(ties); i++ {
			assert.True(t, worse(ties[i-1], ties[i]) < 0)
		}
	}
}

func TestFirstSampleContinuesARun(t *testing.T) {
	set, p := spreads(t, 3, 0, 1, spread.Uniform)
	plan := Plan{Sampling: sampling.Design{Seed: 1, Samples: 1000}, Corners: [][]float64{{0, 0, 0}}, Worst: 1}
	whole := simulate(t, p, set, sumModel, plan)
	k := whole.Worst(0)[0].Sample
	plan.First, plan.Sampling.Samples = k, 1
	alone := simulate(t, p, set, sumModel, plan)
	assert.Equal(t, 1, alone.Units())
	assert.Equal(t, whole.Worst(0)[0], alone.Worst(0)[0])
	plan.Sampling.Method = sampling.Sobol
	_, err := NewMonteCarlo(p, set, plan)
	assert.ErrorContains(t, err, "only independent samples")
}

func TestConstantAndMissingQuantities(t *testing.T) {
	set, p := spreads(t, 1, 0, 3, spread.Uniform)
	mc := simulate(t, p, set, function(func(z, out []float64) { out[0], out[1], out[2] = 5, math.NaN(), 0 }),
		Plan{Sampling: sampling.Design{Seed: 1, Samples: 1000}, Corners: [][]float64{{0}}, Worst: 1})
	zero := mc.Statistics(0, 2)
	assert.Equal(t, []float64{0, 0, 0}, []float64{zero.Mean, zero.Deviation, zero.Quantile(0.01, 0.95).Value})
	s := mc.Statistics(0, 0)
	assert.InDelta(t, 5, s.Mean, 1e-11)
	assert.InDelta(t, 0, s.Deviation, 1e-11)
	q := s.Quantile(0.5, 0.95)
	assert.Equal(t, 5.0, q.Value)
	none := mc.Statistics(0, 1)
	assert.Zero(t, none.Units)
	assert.True(t, math.IsNaN(none.Mean) && math.IsNaN(none.Least) && math.IsNaN(none.Quantile(0.5, 0.95).Value))
	edges, counts, _, _ := none.Histogram(40)
	assert.Empty(t, edges)
	assert.Empty(t, counts)
	assert.Empty(t, mc.Worst(2))
}

func TestFarValuesAreHeldAndCounted(t *testing.T) {
	set, p := spreads(t, 1, 0, 1, spread.Uniform)
	m := function(func(z, out []float64) {
		out[0] = z[0]
		if math.Abs(z[0]) < 1e-5 {
			out[0] = 1e9
		}
	})
	mc := simulate(t, p, set, m, Plan{Sampling: sampling.Design{Seed: 1, Samples: 1 << 18}, Corners: [][]float64{{0}}})
	s := mc.Statistics(0, 0)
	assert.Positive(t, s.Far)
	assert.Equal(t, 1e9, s.Greatest)
	assert.Less(t, s.Mean, 1.0)
}

// A pilot that meets only the flat part of a quantity does not blind the run, if the
// search has seen the rest.
func TestRarelyVaryingQuantityUsesTheKnownSpan(t *testing.T) {
	set, p := spreads(t, 1, 0, 1, spread.Uniform)
	m := function(func(z, out []float64) { out[0] = 1 + 1e4*math.Max(0, z[0]-0.9999) })
	s := NewSearch(p)
	Run(s, m)
	mc := simulate(t, p, set, m, Plan{Sampling: sampling.Design{Seed: 3, Samples: 1 << 18}, Corners: [][]float64{{0}}, Span: s.Span})
	st := mc.Statistics(0, 0)
	assert.Zero(t, st.Far)
	assert.Greater(t, st.Greatest, 1.5)
	assert.InDelta(t, 1+0.5*0.5e-4, st.Mean, 1e-5)
}

// A run's memory does not grow with its samples.
func TestRunMemoryStaysWithinItsBound(t *testing.T) {
	set, p := spreads(t, 20, 3, 51, spread.Uniform)
	p.Targets = p.Targets[:16]
	m := function(func(z, out []float64) { copy(out, z) })
	plan := Plan{Sampling: sampling.Design{Seed: 1, Samples: 20000}, Worst: 100, Workers: 2}
	for k := range 8 {
		c := make([]float64, 23)
		c[22] = float64(k) / 8
		plan.Corners = append(plan.Corners, c)
	}
	var before, after runtime.MemStats
	runtime.ReadMemStats(&before)
	mc, err := NewMonteCarlo(p, set, plan)
	require.NoError(t, err)
	runWorkers(mc, m, 2)
	runtime.ReadMemStats(&after)
	assert.Less(t, after.TotalAlloc-before.TotalAlloc, uint64(64<<20))
	assert.Equal(t, 20000, mc.Statistics(7, 50).Units)
}

func TestSketchMemoryIsBounded(t *testing.T) {
	set, p := spreads(t, 1, 1, 64, spread.Uniform)
	plan := Plan{Sampling: sampling.Design{Seed: 1, Samples: 1000}}
	for range 16 {
		plan.Corners = append(plan.Corners, []float64{0, 1})
	}
	mc, err := NewMonteCarlo(p, set, plan)
	require.NoError(t, err)
	assert.LessOrEqual(t, mc.Bins()*16*64*countBytes, sketchBytes)
	plan.Sampling.Method = sampling.Sobol
	mc, err = NewMonteCarlo(p, set, plan)
	require.NoError(t, err)
	assert.LessOrEqual(t, mc.Bins()*16*16*64*countBytes, sketchBytes)
	for range 48 {
		plan.Corners = append(plan.Corners, []float64{0, 1})
	}
	_, err = NewMonteCarlo(p, set, plan)
	assert.ErrorContains(t, err, "sketches")
	plan.Sampling.Samples = MostUnits + 1
	_, err = NewMonteCarlo(p, set, plan)
	assert.ErrorContains(t, err, "at most 16777216")
}

func BenchmarkMonteCarlo(b *testing.B) {
	for _, quantities := range []int{6, 50} {
		b.Run(fmt.Sprintf("20 spreads/%d quantities", quantities), func(b *testing.B) {
			set, p := spreads(b, 20, 3, quantities, spread.Uniform)
			p.Targets = p.Targets[:12]
			m := function(func(z, out []float64) {
				for i := range out {
					out[i] = z[i%20] + z[(i+7)%20]
				}
			})
			const n = 100000
			for b.Loop() {
				simulate(b, p, set, m, Plan{
					Sampling: sampling.Design{Seed: 1, Samples: n}, Corners: [][]float64{make([]float64, 23)},
					Limits: []Limit{{0, -1.5, 1.5}}, Worst: 3,
				})
			}
			b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/n, "ns/sample")
		})
	}
}
