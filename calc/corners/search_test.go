package corners

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"github.com/stretchr/testify/assert"
	"github.com/stretchr/testify/require"

	"railproof/calc/evaluate"
	"railproof/calc/internal/calctest"
	"railproof/calc/switched"
)

func TestSetPointExtremeIsAtTheVertices(t *testing.T) {
	r := load(t, "corner-05")
	vref, ru, rl := r.in(t, "Vref"), r.in(t, "R_upper"), r.in(t, "R_lower")
	tr, tol := r.in(t, "tol_ref"), r.in(t, "tol_R")
	e, s := search(box(3, 0, 1), function(func(z, out []float64) {
		out[0] = vref * (1 + tr*z[0]) * (1 + ru*(1+tol*z[1])/(rl*(1+tol*z[2])))
	}))
	nominal, status := s.Nominal()
	require.Equal(t, evaluate.OK, status)
	r.check(t, "V_nominal", nominal[0])
	r.check(t, "V_eva_max", e[0].Value)
	r.check(t, "V_eva_min", e[1].Value)
	assert.Equal(t, []float64{1, 1, -1}, e[0].At)
	assert.Equal(t, []float64{-1, -1, 1}, e[1].At)
	assert.False(t, e[0].BeyondVertices || e[1].BeyondVertices)
	assert.False(t, e[0].Proven, "without an analysis nothing is proven")
}

func TestInputCapacitorCurrentIsWorstInsideTheInputRange(t *testing.T) {
	r := load(t, "corner-07")
	i, vout, lo, hi := r.in(t, "Iout"), r.in(t, "Vout"), r.in(t, "Vin_min"), r.in(t, "Vin_max")
	vin := func(z float64) float64 { return (lo+hi)/2 + z*(hi-lo)/2 }
	rms := func(v float64) float64 { return i * math.Sqrt(vout/v*(1-vout/v)) }
	e, _ := search(box(0, 1, 1), function(func(z, out []float64) { out[0] = rms(vin(z[0])) }))
	r.check(t, "at_Vin_min", rms(lo))
	r.check(t, "at_Vin_max", rms(hi))
	r.check(t, "true_max", e[0].Value)
	calctest.Close(t, "input voltage of the worst point", vin(e[0].At[0]), r.Expected["Vin_at_true_max"].Value.(float64), 2e-3)
	r.check(t, "vertex_error", e[0].Vertex/e[0].Value-1)
	assert.True(t, e[0].BeyondVertices)
	assert.False(t, e[1].BeyondVertices, "the least is at an end")
}

func TestPlantedInteriorExtremes(t *testing.T) {
	for _, n := range []int{1, 2, 3, 5, 8} {
		for seed := range uint64(20) {
			f := newBumpy(rand.New(rand.NewPCG(seed, uint64(n))), n)
			e, _ := search(box(n, 0, 1), function(func(z, out []float64) { out[0] = f.at(z) }))
			top := f.top()
			require.InDelta(t, top, e[0].Value, 1e-5*top, "%d coordinates, seed %d: %s", n, seed, describe(&e[0]))
			require.True(t, e[0].BeyondVertices)
		}
	}
}

// Up to sixteen tolerances that only tilt the hill, with its position in the
// conditions: the shape of most quantities of a power stage.
func TestInteriorConditionAmongManyTolerances(t *testing.T) {
	for seed := range uint64(20) {
		r := rand.New(rand.NewPCG(seed, 99))
		const n, m = 16, 3
		f := newBumpy(r, m)
		slope := make([]float64, n)
		for i := range slope {
			slope[i] = 0.1 * r.NormFloat64()
		}
		e, s := search(box(n, m, 1), function(func(z, out []float64) {
			gain := 1.0
			for i, c := range slope {
				gain *= 1 + c*z[i]
			}
			out[0] = gain * f.at(z[n:])
		}))
		gain := 1.0
		for _, c := range slope {
			gain *= 1 + math.Abs(c)
		}
		top := gain * f.top()
		require.InDelta(t, top, e[0].Value, 1e-5*top, "seed %d: %s", seed, describe(&e[0]))
		require.True(t, e[0].BeyondVertices)
		require.LessOrEqual(t, s.Evaluations(), Budget(box(n, m, 1)).Search)
	}
}

func TestInteractionsFlipTheSign(t *testing.T) {
	for name, c := range map[string]struct {
		f             func(z []float64) float64
		greatest, low float64
	}{
		"product":                     {func(z []float64) float64 { return z[0] * z[1] }, 1, -1},
		"product against trend":       {func(z []float64) float64 { return z[0]*z[1] + 0.3*z[0] - 0.2*z[1] }, 1.1, -1.5},
		"three-way":                   {func(z []float64) float64 { return z[0]*z[1]*z[2] + 0.1*z[0] + 0.1*z[1] + 0.1*z[2] }, 1.3, -1.3},
		"sensitivity zero at nominal": {func(z []float64) float64 { return z[0]*z[0]*z[1] + 0.01*z[2] }, 1.01, -1.01},
	} {
		e, _ := search(box(14, 0, 1), function(func(z, out []float64) { out[0] = c.f(z) + 0.001*z[13] }))
		assert.InDelta(t, c.greatest+0.001, e[0].Value, 1e-12, name)
		assert.InDelta(t, c.low-0.001, e[1].Value, 1e-12, name)
	}
}

// phaseRipple is the summed ripple of n interleaved phases relative to one phase at
// duty one half: zero at each multiple of 1/n, with a hump between.
func phaseRipple(n int, d float64) float64 {
	x := float64(n) * d
	f := x - math.Floor(x)
	return f * (1 - f) / float64(n)
}

func TestMultiphaseRippleNullsAtBothEnds(t *testing.T) {
	for n := 2; n <= 6; n++ {
		// input from vout n to vout n/(n-1): duty 1/n to (n-1)/n, nulls at both ends
		lo, hi := 1/(1-1/float64(n)), float64(n)
		if n == 2 {
			lo = 4.0 / 3
		}
		ripple := func(z []float64) float64 {
			vin := (lo+hi)/2 + z[4]*(hi-lo)/2
			return (1 + 0.2*z[0]) * (1 - 0.1*z[1]) * phaseRipple(n, 1/vin*(1+0.01*z[2])) * (1 + 0.01*z[3])
		}
		e, _ := search(box(4, 1, 1), function(func(z, out []float64) { out[0] = ripple(z) }))
		want := 1.2 * 1.1 * 1.01 / 4 / float64(n)
		require.InEpsilon(t, want, e[0].Value, 1e-5, "%d phases: %s", n, describe(&e[0]))
		require.True(t, e[0].BeyondVertices, "%d phases", n)
	}
}

// Where the mode changes the quantity jumps; the worst point is at the border, on
// one side of it.
func TestWorstPointAtAModeBorder(t *testing.T) {
	border := 0.3717
	e, _ := search(box(4, 1, 1), staged(func(z, out []float64) (evaluate.Status, switched.Mode) {
		if z[4]+0.1*z[0] < border {
			out[0] = 2 + z[4] + 0.05*z[1]
			return evaluate.OK, 1
		}
		out[0] = 1 + 0.2*z[4] + 0.05*z[1]
		return evaluate.OK, 0
	}))
	assert.InDelta(t, 2+border+0.1+0.05, e[0].Value, 1e-4, describe(&e[0]))
	assert.LessOrEqual(t, e[0].Value, 2+border+0.1+0.05)
	assert.True(t, e[0].BeyondVertices)
}

func TestFailingRegionIsReportedAndNeverWorst(t *testing.T) {
	e, s := search(box(2, 1, 1), staged(func(z, out []float64) (evaluate.Status, switched.Mode) {
		if z[2] > 0.6 {
			out[0] = math.NaN()
			return evaluate.Runaway, 0
		}
		out[0] = z[0] + z[2]
		return evaluate.OK, 0
	}))
	f := s.Failures()
	require.Len(t, f, 1)
	assert.Equal(t, evaluate.Runaway, f[0].Status)
	assert.Greater(t, f[0].At[2], 0.6)
	assert.Positive(t, f[0].Count)
	assert.InDelta(t, 1.6, e[0].Value, 1e-4, "up to the border of the failing region")
	assert.False(t, math.IsNaN(e[0].Value))
}

func TestNothingHasAValue(t *testing.T) {
	e, s := search(box(2, 1, 1), staged(func(z, out []float64) (evaluate.Status, switched.Mode) {
		out[0] = math.NaN()
		return evaluate.NotConverged, 0
	}))
	assert.True(t, math.IsNaN(e[0].Value))
	assert.Nil(t, e[0].At)
	assert.False(t, e[0].BeyondVertices || e[0].Proven)
	require.Len(t, s.Failures(), 1)
	assert.Zero(t, s.Failures()[0].Distance, "the typical point itself")
}

func TestProvenOnlyWithAnalysisAndWithoutFailure(t *testing.T) {
	p := box(3, 0, 1)
	for i := range p.Targets {
		p.Targets[i].Monotonic = []int8{1, 0, -1} // rising, constant, falling
	}
	f := function(func(z, out []float64) { out[0] = math.Exp(z[0]) - z[2] })
	e, _ := search(p, f)
	assert.True(t, e[0].Proven && e[1].Proven)
	assert.InDelta(t, math.E+1, e[0].Value, 1e-12)
	wrong, _ := search(p, function(func(z, out []float64) { out[0] = z[0]*z[0] - z[2] - z[0] }))
	assert.False(t, wrong[0].Proven, "contradicted by a point found")
	failing, _ := search(p, staged(func(z, out []float64) (evaluate.Status, switched.Mode) {
		out[0] = z[0] - z[2]
		if z[0] < -0.9 {
			return evaluate.DropOut, 0
		}
		return evaluate.OK, 0
	}))
	assert.False(t, failing[0].Proven, "an analysis does not cover failures")
}

// A hard case on purpose: ten coordinates, a hill and a wave. The search alone may
// miss the hill; with the worst of many samples taken in, it must not.
func TestWorstIsNeverBetterThanWhatWasTried(t *testing.T) {
	missed := 0
	for seed := range uint64(10) {
		r := rand.New(rand.NewPCG(seed, 5))
		f := newBumpy(r, 10)
		m := function(func(z, out []float64) { out[0] = f.at(z) * math.Cos(3*z[1]) })
		e, s := search(box(8, 2, 1), m)
		z, out := make([]float64, 10), make([]float64, 1)
		worst, at := math.Inf(-1), make([]float64, 10)
		for range 20000 {
			for i := range z {
				z[i] = 2*r.Float64() - 1
			}
			if m(z, out); out[0] > worst {
				worst = out[0]
				copy(at, z)
			}
		}
		if worst > e[0].Value {
			missed++
			s.Resume([][]float64{at}, []int{0})
			Run(s, m)
			e = s.Extremes()
		}
		assert.GreaterOrEqual(t, e[0].Value, worst, "seed %d", seed)
		assert.GreaterOrEqual(t, e[0].Value, e[0].Vertex)
		nominal, _ := s.Nominal()
		assert.GreaterOrEqual(t, e[0].Value, nominal[0])
		m(e[0].At, out)
		assert.Equal(t, out[0], e[0].Value, "the point given yields the value given")
	}
	assert.LessOrEqual(t, missed, 3, "seeds whose hill the search alone misses")
}

func TestResumeTakesInAWorseSample(t *testing.T) {
	// a needle that points spread over the box miss
	needle := []float64{0.31, -0.62, 0.17, 0.44, -0.25, 0.81}
	f := function(func(z, out []float64) {
		d := 0.0
		for i := range z {
			d += (z[i] - needle[i]) * (z[i] - needle[i])
		}
		out[0] = z[0] + 50*math.Exp(-d/(2*0.05*0.05))
	})
	e, s := search(box(6, 0, 1), f)
	require.Less(t, e[0].Value, 2.0, "the test needs the search to miss it at first")
	near := append([]float64(nil), needle...)
	near[0] += 0.05
	near[3] -= 0.05
	s.Resume([][]float64{make([]float64, 6), near}, []int{0, 1841})
	Run(s, f)
	after := s.Extremes()
	assert.InDelta(t, 50.31, after[0].Value, 1e-2)
	assert.True(t, after[0].BeyondVertices)
	assert.Equal(t, e[1], after[1], "the other target is left alone")
}

func TestResumeKeepsTheSampleWhereNothingIsWorse(t *testing.T) {
	f := function(func(z, out []float64) {
		out[0] = z[0]
		if z[0] == 0.123 {
			out[0] = 9
		}
	})
	_, s := search(box(2, 0, 1), f)
	s.Resume([][]float64{{0.123, 0}}, []int{77})
	Run(s, f)
	e := s.Extremes()[0]
	assert.Equal(t, 9.0, e.Value)
	assert.Equal(t, FromSample, e.Origin)
	assert.Equal(t, 77, e.Sample)
}

func TestSearchIsTheSameOnAnyNumberOfWorkers(t *testing.T) {
	f := newBumpy(rand.New(rand.NewPCG(3, 3)), 12)
	m := function(func(z, out []float64) { out[0] = f.at(z); out[1] = z[0] - f.at(z) })
	var want []Extreme
	for _, workers := range []int{1, 2, 7} {
		s := NewSearch(box(10, 2, 2))
		runWorkers(s, m, workers)
		if want == nil {
			want = s.Extremes()
		}
		assert.Equal(t, want, s.Extremes(), "%d workers", workers)
	}
}

// Widening one spread of the box never narrows an extreme: the box with half the
// width lies in the other.
func TestWiderSpreadNeverNarrowsAnExtreme(t *testing.T) {
	models := map[string]func(z []float64) float64{
		"ripple null": func(z []float64) float64 { return (1 + 0.2*z[0]) * phaseRipple(3, 1/(2.3+z[5]*0.7)) },
		"divider":     func(z []float64) float64 { return (1 + 0.01*z[0]) * (1 + 5*(1+0.01*z[1])/(1+0.01*z[2])) },
		"input rms": func(z []float64) float64 {
			d := (1 + 0.02*z[0]) * 5 / (12 + 6*z[5])
			return (1 + 0.1*z[1]) * math.Sqrt(d*(1-d))
		},
		"smooth": newBumpy(rand.New(rand.NewPCG(8, 8)), 6).at,
	}
	for name, f := range models {
		for wide := range 6 {
			before := [2]float64{math.Inf(-1), math.Inf(1)}
			for _, width := range []float64{0.25, 0.5, 0.75, 1} {
				e, _ := search(box(5, 1, 1), function(func(z, out []float64) {
					var x [6]float64
					copy(x[:], z)
					x[wide] *= width
					out[0] = f(x[:])
				}))
				tolerance := 1e-6 * math.Abs(e[0].Value-e[1].Value)
				assert.GreaterOrEqual(t, e[0].Value, before[0]-tolerance, "%s greatest, coordinate %d width %g", name, wide, width)
				assert.LessOrEqual(t, e[1].Value, before[1]+tolerance, "%s least, coordinate %d width %g", name, wide, width)
				before = [2]float64{e[0].Value, e[1].Value}
			}
		}
	}
}

func TestOneSidedCoordinatesHaveTheirTypicalEnd(t *testing.T) {
	p := box(2, 0, 1)
	p.Coordinates[0].Low = 0
	e, s := search(p, function(func(z, out []float64) { out[0] = z[0] + z[1] }))
	assert.Equal(t, -1.0, e[1].Value)
	assert.Equal(t, []float64{0, -1}, e[1].At)
	assert.False(t, e[1].BeyondVertices)
	low, high := s.OneAtATime(0, 0)
	assert.Equal(t, []float64{0, 1}, []float64{low, high})
}

func BenchmarkSearch(b *testing.B) {
	for _, targets := range []int{4, 12} {
		b.Run(fmt.Sprintf("20 spreads 4 conditions %d targets", targets), func(b *testing.B) {
			f := newBumpy(rand.New(rand.NewPCG(3, 3)), 24)
			p := box(20, 4, targets/2)
			m := function(func(z, out []float64) {
				y := f.at(z)
				for i := range out {
					out[i] = y + z[i]*z[i+1]
				}
			})
			n := 0
			for b.Loop() {
				_, s := search(p, m)
				n = s.Evaluations()
			}
			b.ReportMetric(float64(n), "evaluations")
		})
	}
}

// A quantity without a value where the stage has figures is counted, so that no
// limit passes on what was left out.
func TestMissingValuesAreCounted(t *testing.T) {
	p := box(2, 1, 2)
	p.Targets = []Target{{Quantity: 0}, {Quantity: 1}}
	_, s := search(p, function(func(z, out []float64) {
		out[0], out[1] = z[0], z[1]
		if z[0] > 0.5 {
			out[0] = math.NaN()
		}
	}))
	assert.Positive(t, s.Missing(0))
	assert.Zero(t, s.Missing(1))
}
