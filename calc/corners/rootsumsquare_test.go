package corners

import (
	"math"
	"testing"

	"github.com/stretchr/testify/assert"

	"railproof/calc/evaluate"
	"railproof/calc/internal/calctest"
	"railproof/calc/spread"
	"railproof/calc/switched"
)

func linear(p *Problem, m Model) []RootSumSquare {
	j := NewLinear(p, make([][]float64, len(p.Targets)))
	Run(j, m)
	return j.Results()
}

func TestSetPointRootSumSquare(t *testing.T) {
	r := load(t, "corner-05")
	vref, ru, rl := r.in(t, "Vref"), r.in(t, "R_upper"), r.in(t, "R_lower")
	tr, tol := r.in(t, "tol_ref"), r.in(t, "tol_R")
	e := linear(box(3, 0, 1), function(func(z, out []float64) {
		out[0] = vref * (1 + tr*z[0]) * (1 + ru*(1+tol*z[1])/(rl*(1+tol*z[2])))
	}))[0]
	r.check(t, "V_nominal", e.Typical)
	r.check(t, "sens_R", e.Slopes[1].Above/e.Typical/tol)
	r.check(t, "rss_relative", e.RandomAbove/e.Typical)
	sum := 0.0
	for _, s := range e.Slopes {
		sum += math.Abs(s.Above) / e.Typical
	}
	r.check(t, "eva_linear_relative", sum)
	assert.True(t, e.Trusted())
	assert.Less(t, e.Curvature, 0.02)
}

// The capacitor of the worked example: four random terms under the root, biases of
// both signs added outside it.
func TestBiasAddsLinearly(t *testing.T) {
	r := load(t, "corner-06")
	c, random := r.in(t, "C_nominal"), r.list(t, "random")
	p := box(len(random), 0, 1)
	p.Coordinates = append(p.Coordinates,
		Coordinate{Kind: Bias, Low: 0, High: 1}, Coordinate{Kind: Bias, Low: 0, High: 1})
	m := function(func(z, out []float64) {
		y := 1 - r.in(t, "bias_negative")*z[4] + r.in(t, "bias_positive")*z[5]
		for i, a := range random {
			y += a * z[i]
		}
		out[0] = c * y
	})
	e := linear(p, m)[0]
	r.check(t, "random_rss", e.RandomAbove/c)
	r.check(t, "minimum", e.Least)
	r.check(t, "maximum", e.Greatest)
	calctest.Close(t, "typical", e.Typical, c, 1e-12)
	assert.Less(t, e.Curvature, 1e-9, "a sum is straight")
	x, _ := search(p, m)
	r.check(t, "eva_maximum", x[0].Value)
	r.check(t, "eva_minimum", x[1].Value)
}

func TestAdditiveAttributionByTheSlopes(t *testing.T) {
	r := load(t, "corner-09")
	c, a := r.list(t, "c"), r.list(t, "half_width")
	e := linear(box(3, 0, 1), function(func(z, out []float64) {
		out[0] = 1 + c[0]*a[0]*z[0] + c[1]*a[1]*z[1] + c[2]*a[2]*z[2]
	}))[0]
	r.check(t, "sigma_total", e.Deviation)
	for i, name := range []string{"S_ref", "S_R_upper", "S_R_lower"} {
		m := uniformMoments()
		d := m.Deviation(e.Slopes[i].Above, e.Slopes[i].Below)
		r.check(t, name, d*d/(e.Deviation*e.Deviation))
	}
}

func TestCurvedResponsesAreNotTrusted(t *testing.T) {
	for name, c := range map[string]struct {
		f       func(z []float64) float64
		trusted bool
	}{
		"straight":         {func(z []float64) float64 { return 3*z[0] - z[1] }, true},
		"slightly bent":    {func(z []float64) float64 { return 3*z[0] - z[1] + 0.1*z[0]*z[0] }, true},
		"bent":             {func(z []float64) float64 { return 3*z[0] - z[1] + z[0]*z[0] }, false},
		"interaction":      {func(z []float64) float64 { return z[0] + z[1] + z[0]*z[1] }, false},
		"saturating":       {func(z []float64) float64 { return math.Tanh(3*z[0]) + 0.1*z[1] }, false},
		"fails on the way": {func(z []float64) float64 { return z[0] + math.Log(0.5-z[0]) }, false},
	} {
		e := linear(box(2, 0, 1), function(func(z, out []float64) { out[0] = c.f(z) }))[0]
		assert.Equal(t, c.trusted, e.Trusted(), "%s: curvature %g", name, e.Curvature)
	}
}

// With the typical value off the middle each side has its own half width, and the
// deviation is that of the value's own distribution.
func TestUnequalSides(t *testing.T) {
	s, err := spread.New([]spread.Variable{{Pointer: "/a", Min: 9, Typ: 9, Max: 12}, {Pointer: "/b", Min: 1, Typ: 2, Max: 5}})
	assert.NoError(t, err)
	p := box(2, 0, 1)
	for i := range p.Coordinates {
		p.Coordinates[i].Moments = s.Moments(i)
	}
	p.Coordinates[0].Low = 0
	values := make([]float64, 2)
	e := linear(p, function(func(z, out []float64) {
		s.Apply(z, values)
		out[0] = values[0] - 2*values[1]
	}))[0]
	assert.InDelta(t, math.Hypot(3, 2), e.RandomAbove, 1e-9, "3 up by a, 2 up by b falling from 2 to 1")
	assert.InDelta(t, 6, e.RandomBelow, 1e-9, "a does not fall; b rises by 3")
	assert.InDelta(t, math.Sqrt((9.0+4*16)/12), e.Deviation, 1e-9, "uniform deviations of widths 3 and 4")
}

func TestLinearEstimateAtEachTargetsConditions(t *testing.T) {
	p := box(1, 1, 2)
	j := NewLinear(p, [][]float64{{1, 1}, nil, {1, -1}, {0.3, 1}})
	n := 0
	Run(j, staged(func(z, out []float64) (evaluate.Status, switched.Mode) {
		n++
		out[0], out[1] = z[0]*(1+z[1]), z[1]
		return evaluate.OK, 0
	}))
	e := j.Results()
	assert.InDelta(t, 2, e[0].RandomAbove, 1e-12)
	assert.InDelta(t, 1, e[1].RandomBelow, 1e-12, "typical conditions")
	assert.InDelta(t, -1, e[2].Typical, 1e-12)
	assert.Zero(t, e[2].RandomAbove)
	assert.Zero(t, e[2].Curvature)
	assert.Equal(t, []float64{0, 1}, e[3].Corner, "tolerances typical, conditions at the worst point")
	assert.Equal(t, 3*5+4*2, n, "three distinct corners share their slopes")
}
