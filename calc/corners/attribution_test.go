package corners

import (
	"fmt"
	"math"
	"testing"

	"github.com/stretchr/testify/assert"
	"github.com/stretchr/testify/require"

	"railproof/calc/evaluate"
	"railproof/calc/spread"
	"railproof/calc/switched"
)

func attribute(t testing.TB, p *Problem, set *spread.Set, m Model, base int) *Attribution {
	a, err := NewAttribution(p, set, AttributionPlan{Base: base, Seed: 1, Corner: make([]float64, len(p.Coordinates))})
	require.NoError(t, err)
	Run(a, m)
	return a
}

func TestIshigamiIndices(t *testing.T) {
	r := load(t, "corner-08")
	a, b := r.in(t, "a"), r.in(t, "b")
	ishigami := function(func(z, out []float64) {
		x1, x2, x3 := math.Pi*z[0], math.Pi*z[1], math.Pi*z[2]
		out[0] = math.Sin(x1) + a*math.Pow(math.Sin(x2), 2) + b*math.Pow(x3, 4)*math.Sin(x1)
	})
	set, p := spreads(t, 3, 0, 1, spread.Uniform)
	for base, tolerance := range map[int]float64{4096: 0.02, 1 << 14: 0.01} {
		at := attribute(t, p, set, ishigami, base)
		s := at.Shares(0, 0.999)
		require.True(t, s.Defined)
		assert.Equal(t, base, s.Rows)
		assert.InEpsilon(t, r.Expected["variance"].Value.(float64), s.Variance, 0.02)
		require.Len(t, s.Shares, 3)
		assert.Equal(t, 0, s.Shares[0].Coordinate, "sorted by the total index")
		for _, x := range s.Shares {
			first := r.Expected[fmt.Sprint("S", x.Coordinate+1)].Value.(float64)
			total := r.Expected[fmt.Sprint("ST", x.Coordinate+1)].Value.(float64)
			assert.InDelta(t, first, x.First, tolerance, "first order, coordinate %d, base %d", x.Coordinate, base)
			assert.InDelta(t, total, x.Total, tolerance, "total, coordinate %d, base %d", x.Coordinate, base)
			assert.True(t, x.FirstLow <= first && first <= x.FirstHigh, "%+v", x)
			assert.True(t, x.TotalLow <= total && total <= x.TotalHigh, "%+v", x)
			assert.Less(t, x.FirstHigh-x.FirstLow, 0.2)
		}
	}
	at, err := NewAttribution(p, set, AttributionPlan{Base: 4096, Corner: make([]float64, 3)})
	require.NoError(t, err)
	assert.Equal(t, 4096*5+1, at.Evaluations())
}

func TestAdditiveIndicesAgreeAndSumToOne(t *testing.T) {
	c := []float64{3, -2, 1, 0.5}
	set, p := spreads(t, 4, 0, 1, spread.Triangular)
	s := attribute(t, p, set, function(func(z, out []float64) {
		out[0] = 1e6 // far from zero: centring must not lose the variance
		for i := range c {
			out[0] += c[i] * z[i]
		}
	}), 4096).Shares(0, 0.95)
	sum := 0.0
	for _, x := range s.Shares {
		want := c[x.Coordinate] * c[x.Coordinate] / (9 + 4 + 1 + 0.25)
		assert.InDelta(t, want, x.First, 0.01)
		assert.InDelta(t, want, x.Total, 0.01)
		sum += x.Total
	}
	assert.InDelta(t, 1, sum, 0.02)
}

func TestIndicesOfAConstantAreUndefined(t *testing.T) {
	set, p := spreads(t, 2, 0, 2, spread.Uniform)
	a := attribute(t, p, set, function(func(z, out []float64) { out[0], out[1] = 3, math.NaN() }), 64)
	for q := range 2 {
		s := a.Shares(q, 0.95)
		assert.False(t, s.Defined)
		assert.Empty(t, s.Shares)
	}
	assert.Zero(t, a.Shares(1, 0.95).Rows)
	for _, base := range []int{32, 100} {
		_, err := NewAttribution(p, set, AttributionPlan{Base: base})
		assert.ErrorContains(t, err, "power of two")
	}
}

func TestRowsWithFailuresAreLeftOut(t *testing.T) {
	set, p := spreads(t, 2, 0, 1, spread.Uniform)
	s := attribute(t, p, set, staged(func(z, out []float64) (evaluate.Status, switched.Mode) {
		if out[0] = z[0]; z[1] > 0.9 {
			out[0] = math.NaN()
			return evaluate.Runaway, 0
		}
		return evaluate.OK, 0
	}), 4096).Shares(0, 0.95)
	assert.InDelta(t, 4096*0.95*0.95, s.Rows, 40)
	assert.InDelta(t, 1, s.Shares[0].Total, 0.02)
}

func TestIndicesAreTheSameOnAnyNumberOfWorkers(t *testing.T) {
	set, p := spreads(t, 5, 1, 2, spread.Normal)
	m := function(func(z, out []float64) { out[0] = z[0]*z[1] + z[2] + z[5]*z[3]; out[1] = math.Exp(z[4]) })
	var want []Shares
	for _, workers := range []int{1, 2, 7} {
		a, err := NewAttribution(p, set, AttributionPlan{Base: 2048, Seed: 5, Corner: []float64{0, 0, 0, 0, 0, 1}, Workers: workers})
		require.NoError(t, err)
		runWorkers(a, m, workers)
		got := []Shares{a.Shares(0, 0.95), a.Shares(1, 0.95)}
		if want == nil {
			want = got
		}
		assert.Equal(t, want, got, "%d workers", workers)
	}
	assert.InDelta(t, 1.0/3, want[0].Shares[0].Total, 0.4)
}

func TestMoreCoordinatesThanTheSequenceHas(t *testing.T) {
	set, p := spreads(t, 130, 0, 1, spread.Uniform)
	s := attribute(t, p, set, function(func(z, out []float64) { out[0] = z[0] + z[129] }), 1024).Shares(0, 0.95)
	assert.InDelta(t, 0.5, s.Shares[0].Total, 0.1)
	assert.InDelta(t, 0.5, s.Shares[1].Total, 0.1)
}

func TestWorstCaseWidthByCoordinate(t *testing.T) {
	p := box(3, 1, 1)
	m := function(func(z, out []float64) { out[0] = 5 + 3*z[0] - z[1] + 4*z[3] })
	e, _ := search(p, m)
	j := NewWidth(p, e)
	Run(j, m)
	for target, sign := range []float64{1, -1} {
		s := j.Shares(target)
		require.Len(t, s, 4)
		assert.Equal(t, []int{3, 0, 1, 2}, []int{s[0].Coordinate, s[1].Coordinate, s[2].Coordinate, s[3].Coordinate})
		assert.InDelta(t, sign*4, s[0].Change, 1e-12)
		assert.InDelta(t, 0.5, s[0].Share, 1e-12, "4 of 8")
		assert.InDelta(t, 0.375, s[1].Share, 1e-12)
		assert.Zero(t, s[3].Share)
	}
	none := NewWidth(p, []Extreme{{}})
	Run(none, m)
	assert.Nil(t, none.Shares(0))
}

func BenchmarkAttribution(b *testing.B) {
	set, p := spreads(b, 20, 3, 8, spread.Uniform)
	m := function(func(z, out []float64) {
		for i := range out {
			out[i] = z[i] + z[i+7]*z[i+1]
		}
	})
	for b.Loop() {
		a := attribute(b, p, set, m, 4096)
		for q := range 8 {
			a.Shares(q, 0.95)
		}
	}
}
