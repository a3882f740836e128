package preferred_test

import (
	"encoding/json"
	"fmt"
	"math"
	"os"
	"testing"

	"github.com/stretchr/testify/assert"
	"github.com/stretchr/testify/require"
	"pgregory.net/rapid"

	"railproof/calc/preferred"
)

// published returns the expected lists of one case of the reference data.
func published(t *testing.T, id string) map[string]json.RawMessage {
	t.Helper()
	raw, err := os.ReadFile("../../tests/reference/power-stage.json")
	require.NoError(t, err)
	var cases []struct {
		ID       string
		Expected []struct {
			Name  string
			Value json.RawMessage
		}
	}
	require.NoError(t, json.Unmarshal(raw, &cases))
	for _, c := range cases {
		if c.ID == id {
			m := map[string]json.RawMessage{}
			for _, e := range c.Expected {
				m[e.Name] = e.Value
			}
			return m
		}
	}
	t.Fatalf("no case %s", id)
	return nil
}

func list(t *testing.T, raw json.RawMessage) (v []int) {
	t.Helper()
	require.NoError(t, json.Unmarshal(raw, &v))
	return v
}

// hundredths returns the mantissas of a series as integers, 100 for 1.
func hundredths(s preferred.Series) []int {
	v := make([]int, len(s.Mantissas()))
	for i, m := range s.Mantissas() {
		v[i] = int(math.Round(m * 100))
	}
	return v
}

// IEC 60063, case ps-st-01: E3 to E24.
func TestSeriesUpToE24StandAsInTheStandard(t *testing.T) {
	want := published(t, "ps-st-01")
	for name, s := range map[string]preferred.Series{"e24": preferred.E24, "e12": preferred.E12, "e6": preferred.E6, "e3": preferred.E3} {
		tens := hundredths(s)
		for i, m := range tens {
			require.Zero(t, m%10, "%s holds %d", name, m)
			tens[i] = m / 10
		}
		assert.Equal(t, list(t, want[name]), tens, name)
	}
	var differ []int
	for i, m := range hundredths(preferred.E24) {
		if m != 10*int(math.Round(10*math.Pow(10, float64(i)/24))) {
			differ = append(differ, m/10)
		}
	}
	assert.Equal(t, list(t, want["e24_not_equal_to_rounded_geometric"]), differ)
}

// IEC 60063, case ps-st-02: E48, E96 and E192 with its one exception.
func TestSeriesAboveE24StandAsInTheStandard(t *testing.T) {
	want := published(t, "ps-st-02")
	assert.Equal(t, list(t, want["e192"]), hundredths(preferred.E192))
	var exceptions [][]int
	for i, m := range hundredths(preferred.E192) {
		if r := int(100*math.Pow(10, float64(i)/192) + 0.5); r != m {
			exceptions = append(exceptions, []int{i, m, r})
		}
	}
	var wantExceptions [][]int
	require.NoError(t, json.Unmarshal(want["e192_exceptions"], &wantExceptions))
	assert.Equal(t, wantExceptions, exceptions)
	for name, s := range map[string]preferred.Series{"e96_matches_formula": preferred.E96, "e48_matches_formula": preferred.E48} {
		matches := true
		for i, m := range hundredths(s) {
			matches = matches && m == int(100*math.Pow(10, float64(i)/float64(s))+0.5)
		}
		assert.Equal(t, string(want[name]), fmt.Sprint(matches), name)
	}
	for _, s := range []preferred.Series{preferred.E48, preferred.E96, preferred.E192} {
		assert.False(t, s.Contains(2.7), s)
		assert.False(t, s.Contains(3.3), s)
		assert.Equal(t, s == preferred.E192, s.Contains(4.7), "4.7 stands in E192 only, as 470: %v", s)
	}
}

func TestPicksAcrossDecadesAndRounding(t *testing.T) {
	fromArithmetic := 4.7e-6 * (1 + 3e-16)
	for _, c := range []struct {
		name      string
		got, want float64
	}{
		{"at least, just above a value", preferred.E12.AtLeast(4.71e-6), 5.6e-6},
		{"at least, equal up to rounding", preferred.E6.AtLeast(fromArithmetic), 4.7e-6},
		{"at most, equal up to rounding", preferred.E6.AtMost(4.7e-6 * (1 - 3e-16)), 4.7e-6},
		{"at least carries into the next decade", preferred.E6.AtLeast(6.9e-9), 1e-8},
		{"at most carries into the decade below", preferred.E12.AtMost(0.99e3), 820},
		{"nearest falls below a computed minimum", preferred.E6.Nearest(5.1e-6), 4.7e-6},
		{"nearest carries upward", preferred.E24.Nearest(9.7), 10},
		{"a power of ten is its own value", preferred.E3.AtLeast(1e-7), 1e-7},
		{"one decade, the exception of E192", preferred.E192.Nearest(9.2e3), 9.2e3},
		{"E96 has no 9.20", preferred.E96.Nearest(9.2e3), 9.09e3},
	} {
		assert.Equal(t, c.want, c.got, c.name)
	}
	for _, bad := range []float64{0, -1, math.NaN(), math.Inf(1)} {
		assert.True(t, math.IsNaN(preferred.E24.AtLeast(bad)), "%v", bad)
		assert.True(t, math.IsNaN(preferred.E24.AtMost(bad)), "%v", bad)
		assert.True(t, math.IsNaN(preferred.E24.Nearest(bad)), "%v", bad)
		assert.False(t, preferred.E24.Contains(bad), "%v", bad)
	}
	assert.Equal(t, []float64{4.7e-6, 6.8e-6, 1e-5, 1.5e-5}, preferred.E6.Between(fromArithmetic, 1.5e-5, 99))
	assert.Equal(t, []float64{4.7e-6, 6.8e-6}, preferred.E6.Between(4.7e-6, 1.5e-5, 2))
	assert.Empty(t, preferred.E6.Between(4.8e-6, 6.7e-6, 99))
	assert.Empty(t, preferred.E6.Between(2, 1, 99))
	for _, s := range preferred.All() {
		named, ok := preferred.ByName(s.String())
		assert.True(t, ok && named == s)
	}
	_, ok := preferred.ByName("E7")
	assert.False(t, ok)
}

func TestPicksAgreeWithASearchThroughEveryValue(t *testing.T) {
	every := map[preferred.Series][]float64{}
	for _, s := range preferred.All() {
		for e := -13; e <= 8; e++ {
			for _, m := range hundredths(s) {
				every[s] = append(every[s], float64(m)*math.Pow(10, float64(e-2)))
			}
		}
	}
	rapid.Check(t, func(t *rapid.T) {
		s := rapid.SampledFrom(preferred.All()).Draw(t, "series")
		x := math.Pow(10, rapid.Float64Range(-12, 7).Draw(t, "log"))
		low, high, near := 0.0, math.Inf(1), math.Inf(1)
		for _, v := range every[s] {
			if v <= x*(1+1e-9) {
				low = max(low, v)
			}
			if v >= x*(1-1e-9) {
				high = min(high, v)
			}
			if math.Abs(v-x) < math.Abs(near-x)*(1-1e-12) {
				near = v
			}
		}
		assert.InEpsilon(t, low, s.AtMost(x), 1e-12)
		assert.InEpsilon(t, high, s.AtLeast(x), 1e-12)
		assert.InDelta(t, math.Abs(near-x), math.Abs(s.Nearest(x)-x), 1e-12*x)
	})
}

func TestDividerIsTheBestOfAllPairs(t *testing.T) {
	for _, c := range []struct{ reference, output float64 }{{0.8, 5}, {0.6, 3.3}, {1.25, 12}, {0.8, 0.82}, {0.5, 48}} {
		for _, s := range []preferred.Series{preferred.E24, preferred.E96} {
			d, ok := s.NewDivider(c.reference, c.output, 1e4)
			require.True(t, ok)
			assert.True(t, s.Contains(d.Upper) && s.Contains(d.Lower))
			assert.InEpsilon(t, c.reference*(1+d.Upper/d.Lower), d.Output, 1e-12)
			assert.InDelta(t, d.Output/c.output-1, d.Error, 1e-12)
			for _, low := range s.Between(1e4/math.Sqrt(10), 1e4*math.Sqrt(10), 999) {
				for _, up := range s.Between(1e1, 1e7, 9999) {
					e := math.Abs(c.reference*(1+up/low)/c.output - 1)
					require.False(t, e < math.Abs(d.Error)-1e-9, "%v/%v errs by %g, %v/%v by %g", up, low, e, d.Upper, d.Lower, d.Error)
				}
			}
		}
	}
	d, ok := preferred.E96.NewDivider(0.8, 0.8, 1e4)
	assert.True(t, ok)
	assert.Equal(t, preferred.Divider{Lower: 1e4, Output: 0.8}, d)
	for _, bad := range [][3]float64{{0.8, 0.7, 1e4}, {0, 5, 1e4}, {0.8, math.NaN(), 1e4}, {0.8, 5, -1}} {
		_, ok = preferred.E96.NewDivider(bad[0], bad[1], bad[2])
		assert.False(t, ok, "%v", bad)
	}
}

func ExampleSeries_AtLeast() {
	fmt.Println(preferred.E6.AtLeast(5.1e-6), preferred.E6.Nearest(5.1e-6))
	// Output: 6.8e-06 4.7e-06
}

func ExampleSeries_NewDivider() {
	d, _ := preferred.E96.NewDivider(0.8, 5, 10e3)
	fmt.Printf("%g over %g ohm: %.5g V, %+.3f %%\n", d.Upper, d.Lower, d.Output, 100*d.Error)
	// Output: 105000 over 20000 ohm: 5 V, +0.000 %
}
