package spread

import (
	"errors"
	"fmt"
	"math"
	"testing"

	"github.com/stretchr/testify/assert"
	"github.com/stretchr/testify/require"
	"gonum.org/v1/gonum/stat/distuv"
)

// cumulative returns the distribution function that DEFINITIONS give a value.
func cumulative(v *Variable, x float64) float64 {
	switch v.Distribution {
	case Uniform:
		return (x - v.Min) / (v.Max - v.Min)
	case Triangular:
		switch {
		case x <= v.Min:
			return 0
		case x < v.Typ:
			return (x - v.Min) * (x - v.Min) / ((v.Max - v.Min) * (v.Typ - v.Min))
		case x >= v.Max:
			return 1
		}
		return 1 - (v.Max-x)*(v.Max-x)/((v.Max-v.Min)*(v.Max-v.Typ))
	}
	n := distuv.Normal{Mu: v.Typ, Sigma: (v.Max - v.Min) / 6}
	return (n.CDF(x) - n.CDF(v.Min)) / (n.CDF(v.Max) - n.CDF(v.Min))
}

func TestValuesFollowTheirDistributions(t *testing.T) {
	for _, d := range []Distribution{Uniform, Triangular, Normal} {
		for _, typ := range []float64{2, 2.5, 3, 3.9, 4} {
			v := Variable{Pointer: "/a", Min: 2, Typ: typ, Max: 4, Distribution: d}
			s, err := New([]Variable{v})
			require.NoError(t, err)
			z, values := []float64{0}, []float64{0}
			for i := range 2001 {
				u := (float64(i) + 0.5) / 2001
				s.Place([]float64{u}, z)
				s.Apply(z, values)
				require.True(t, z[0] >= -1 && z[0] <= 1 && values[0] >= 2 && values[0] <= 4)
				require.InDelta(t, u, cumulative(&v, values[0]), 6e-9, "%s typ %g u %g", d, typ, u)
			}
		}
	}
}

func TestMomentsGiveTheDeviationOfATwoSidedResponse(t *testing.T) {
	for _, d := range []Distribution{Uniform, Triangular, Normal} {
		for _, typ := range []float64{2, 2.5, 3, 4} {
			s, _ := New([]Variable{{Pointer: "/a", Min: 2, Typ: typ, Max: 4, Distribution: d}})
			const n = 200000
			above, below := 1.3, -0.4
			sum, square, z := 0.0, 0.0, []float64{0}
			for i := range n {
				s.Place([]float64{(float64(i) + 0.5) / n}, z)
				y := z[0] * above
				if z[0] < 0 {
					y = z[0] * below
				}
				sum, square = sum+y/n, square+y*y/n
			}
			m := s.Moments(0)
			assert.InDelta(t, math.Sqrt(square-sum*sum), m.Deviation(above, below), 1e-6, "%s typ %g", d, typ)
		}
	}
	s, _ := New([]Variable{{Pointer: "/a", Min: -1, Typ: 0, Max: 1}})
	m := s.Moments(0)
	assert.InDelta(t, 1/math.Sqrt(3), m.Deviation(1, 1), 1e-15, "uniform half-width over root three")
}

func TestEndsAreExact(t *testing.T) {
	v := Variable{Pointer: "/a", Min: 0.1, Typ: 9e-3 + 0.1, Max: 12e-3 + 0.1}
	s, err := New([]Variable{v})
	require.NoError(t, err)
	values := make([]float64, 1)
	for z, want := range map[float64]float64{-1: v.Min, 0: v.Typ, 1: v.Max} {
		s.Apply([]float64{z}, values)
		assert.Equal(t, want, values[0])
		assert.Equal(t, want, v.At(z))
	}
	for _, z := range []float64{-0.999, -0.3, 0.2, 0.77} {
		s.Apply([]float64{z}, values)
		assert.Equal(t, v.At(z), values[0])
	}
}

func TestGroupsShareACoordinateAndCancelInARatio(t *testing.T) {
	s, err := New([]Variable{
		{Pointer: "/upper", Min: 99, Typ: 100, Max: 101, Group: "reel"},
		{Pointer: "/reference", Min: 0.79, Typ: 0.8, Max: 0.81},
		{Pointer: "/lower", Min: 9.9, Typ: 10, Max: 10.1, Group: "reel", MatchTol: 0.001},
	})
	require.NoError(t, err)
	require.Equal(t, 3, s.Len(), "group, reference, residual")
	assert.Equal(t, []string{"/upper", "/lower"}, s.Coordinates()[0].Pointers)
	assert.Equal(t, Coordinate{[]string{"/lower"}, "reel", true, Uniform}, s.Coordinates()[2])
	values := make([]float64, 3)
	for _, z := range []float64{-1, -0.4, 0.3, 1} {
		s.Apply([]float64{z, 0, 0}, values)
		assert.InEpsilon(t, 10, values[0]/values[2], 1e-14, "the ratio does not move with the reel")
		s.Apply([]float64{z, 0, 1}, values)
		assert.InEpsilon(t, 10/1.001, values[0]/values[2], 1e-14, "the residual moves it alone")
	}
}

func TestContradictionsPointAtTheSpread(t *testing.T) {
	ok := Variable{Pointer: "/a", Min: 1, Typ: 2, Max: 3, Group: "g"}
	for name, c := range map[string]struct {
		v                Variable
		keyword, mention string
	}{
		"min above typ":               {Variable{Min: 3, Typ: 2, Max: 4}, "order", "min 3"},
		"max below typ":               {Variable{Min: 1, Typ: 2, Max: 1.5}, "order", "max 1.5"},
		"not a number":                {Variable{Min: math.NaN(), Typ: 2, Max: 3}, "order", "NaN"},
		"infinite":                    {Variable{Min: 1, Typ: 2, Max: math.Inf(1)}, "order", ""},
		"no width":                    {Variable{Min: 2, Typ: 2, Max: 2}, "width", "no width"},
		"no width in a group":         {Variable{Min: 2, Typ: 2, Max: 2, Group: "g"}, "group", "cannot move"},
		"other distribution in group": {Variable{Min: 1, Typ: 2, Max: 3, Group: "g", Distribution: Normal}, "group", "the one at /a says uniform"},
		"match without group":         {Variable{Min: 1, Typ: 2, Max: 3, MatchTol: 0.1}, "match_tol", "needs a group"},
		"match out of range":          {Variable{Min: 1, Typ: 2, Max: 3, MatchTol: -0.1, Group: "g"}, "match_tol", "at least 0"},
	} {
		c.v.Pointer = "/b"
		_, err := New([]Variable{ok, c.v})
		var invalid *InvalidError
		require.True(t, errors.As(err, &invalid), name)
		require.Len(t, invalid.Faults, 1, name)
		assert.Equal(t, "/b", invalid.Faults[0].Pointer, name)
		assert.Equal(t, c.keyword, invalid.Faults[0].Keyword, name)
		assert.Contains(t, invalid.Faults[0].Detail, c.mention, name)
	}
	_, err := New([]Variable{ok, ok})
	var invalid *InvalidError
	require.True(t, errors.As(err, &invalid))
	assert.Equal(t, "duplicate", invalid.Faults[0].Keyword)
	assert.EqualError(t, err, "spread: invalid: /a")
}

func TestPlaceAndApplyDoNotAllocate(t *testing.T) {
	s, u, z, values := bench(t, 20, Normal)
	assert.Zero(t, testing.AllocsPerRun(100, func() { s.Place(u, z); s.Apply(z, values) }))
}

func bench(t testing.TB, n int, d Distribution) (s *Set, u, z, values []float64) {
	variables := make([]Variable, n)
	u, z, values = make([]float64, n), make([]float64, n), make([]float64, n)
	for i := range variables {
		variables[i] = Variable{Pointer: fmt.Sprint("/", i), Min: 1, Typ: 2, Max: 3 + float64(i%2), Distribution: d}
		u[i] = math.Mod(float64(i)*0.61803, 1)
	}
	s, err := New(variables)
	require.NoError(t, err)
	return s, u, z, values
}

func BenchmarkPlaceApply(b *testing.B) {
	for _, d := range []Distribution{Uniform, Triangular, Normal} {
		b.Run(fmt.Sprintf("%s/25", d), func(b *testing.B) {
			s, u, z, values := bench(b, 25, d)
			i := 0
			for b.Loop() {
				if i++; i == 25 {
					i = 0
				}
				u[i] = 1 - u[i]
				s.Place(u, z)
				s.Apply(z, values)
			}
		})
	}
}
