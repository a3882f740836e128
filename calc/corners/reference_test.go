package corners

import (
	"math"
	"testing"

	"github.com/stretchr/testify/assert"
	"github.com/stretchr/testify/require"

	"railproof/calc/internal/calctest"
)

// reference is one published case of tests/reference/loop-corners-rules.json.
type reference struct {
	ID       string
	Inputs   map[string]struct{ Value any }
	Expected map[string]struct {
		Value  any
		TolRel float64 `json:"tol_rel"`
		TolAbs float64 `json:"tol_abs"`
	}
}

func load(t *testing.T, id string) reference {
	t.Helper()
	var doc struct{ Cases []reference }
	calctest.Load(t, "loop-corners-rules.json", &doc)
	for _, c := range doc.Cases {
		if c.ID == id {
			return c
		}
	}
	t.Fatalf("case %s is missing", id)
	return reference{}
}

func (r *reference) in(t *testing.T, name string) float64 {
	t.Helper()
	v, ok := r.Inputs[name].Value.(float64)
	require.True(t, ok, "%s input %s", r.ID, name)
	return v
}

func (r *reference) list(t *testing.T, name string) []float64 {
	t.Helper()
	list := r.Inputs[name].Value.([]any)
	v := make([]float64, len(list))
	for i, x := range list {
		v[i] = x.(float64)
	}
	require.NotEmpty(t, v)
	return v
}

// check compares with the case's value by the case's own tolerance.
func (r *reference) check(t *testing.T, name string, got float64) {
	t.Helper()
	e, ok := r.Expected[name]
	require.True(t, ok, "%s expects no %s", r.ID, name)
	want := e.Value.(float64)
	calctest.Within(t, r.ID+" "+name, got, want, e.TolAbs+e.TolRel*math.Abs(want))
}

func TestWilksSampleSizes(t *testing.T) {
	r := load(t, "corner-01")
	b, g := r.in(t, "coverage"), r.in(t, "confidence")
	for order, name := range map[int]string{1: "one_sided_95_95_order1", 2: "one_sided_95_95_order2", 3: "one_sided_95_95_order3", 4: "one_sided_95_95_order4", 5: "one_sided_95_95_order5"} {
		n := WilksSize(b, g, order)
		r.check(t, name, float64(n))
		assert.Equal(t, order, WilksOrder(n, b, g))
		assert.Equal(t, order-1, WilksOrder(n-1, b, g))
	}
	for order, name := range map[int]string{1: "two_sided_95_95_order1", 2: "two_sided_95_95_order2", 3: "two_sided_95_95_order3"} {
		r.check(t, name, float64(WilksSizeTwoSided(b, g, order)))
	}
	// further sizes, computed by the sum of binomial terms
	assert.Equal(t, 299, WilksSize(0.99, 0.95, 1))
	assert.Equal(t, 90, WilksSize(0.95, 0.99, 1))
	assert.Equal(t, 459, WilksSize(0.99, 0.99, 1))
	assert.Equal(t, 1109, WilksSize(0.9973, 0.95, 1))
	assert.Equal(t, 473, WilksSizeTwoSided(0.99, 0.95, 1))
	assert.Zero(t, WilksSize(1, 0.95, 1))
	assert.Zero(t, WilksSize(0.95, math.NaN(), 1))
	assert.InDelta(t, 0.95, CoveredShare(59, 0.95), 6e-4, "59 samples cover 95 %")
}

func TestClopperPearsonHandbookExample(t *testing.T) {
	r := load(t, "corner-02")
	n, k, confidence := int(r.in(t, "n")), int(r.in(t, "defects")), r.in(t, "confidence")
	low, high := ClopperPearson(k, n, confidence)
	r.check(t, "cp_lower", low)
	r.check(t, "cp_upper", high)
	low, high = ClopperPearson(n-k, n, confidence)
	calctest.Close(t, "complement", 1-high, 0.07135388, 1e-6)
	calctest.Close(t, "complement", 1-low, 0.4010281, 1e-6)
	low, _ = ClopperPearson(5, 4, 0.9)
	assert.True(t, math.IsNaN(low))
}

func TestWilsonInterval(t *testing.T) {
	r := load(t, "corner-02")
	n, k := int(r.in(t, "n")), int(r.in(t, "defects"))
	for confidence, name := range map[float64]string{0.9: "wilson90", 0.95: "wilson95"} {
		low, high := Wilson(k, n, confidence)
		r.check(t, name+"_lower", low)
		r.check(t, name+"_upper", high)
	}
}

func TestZeroFailuresProveLittle(t *testing.T) {
	r := load(t, "corner-03")
	n := int(r.in(t, "n"))
	one := ClopperPearsonUpper(0, n, 0.95)
	r.check(t, "fail_upper_one_sided_95", one)
	_, two := ClopperPearson(0, n, 0.95)
	r.check(t, "fail_upper_two_sided_95", two)
	r.check(t, "n_for_99pct_yield_95conf", float64(WilksSize(0.99, 0.95, 1)))
	r.check(t, "rule_of_three", 3/float64(n))
	assert.InEpsilon(t, 3/float64(n), one, 0.01, "the rule of three is near the exact bound")
}

func TestCapabilityHandbookExample(t *testing.T) {
	r := load(t, "corner-04")
	c := CapabilityOf(r.in(t, "mean"), r.in(t, "s"), r.in(t, "LSL"), r.in(t, "USL"))
	r.check(t, "Cp", c.Cp)
	r.check(t, "Cpu", c.Upper)
	r.check(t, "Cpl", c.Lower)
	r.check(t, "Cpk", c.Cpk)
	one := CapabilityOf(16, 2, math.NaN(), 20)
	assert.True(t, math.IsNaN(one.Cp), "one limit has no Cp")
	assert.Equal(t, c.Upper, one.Cpk)
	assert.Negative(t, CapabilityOf(21, 2, 8, 20).Cpk, "mean outside the limits")
	p := PercentileCapability(10, 16, 22, 8, 20)
	assert.Equal(t, c, p, "for a normal distribution both agree")
}

func TestNormalToleranceFactors(t *testing.T) {
	r := load(t, "corner-11")
	n, b, g := int(r.in(t, "n")), r.in(t, "coverage"), r.in(t, "confidence")
	r.check(t, "k_one_sided_exact", NormalToleranceOneSided(n, b, g))
	r.check(t, "k_two_sided_howe", HoweTolerance(n, b, g))
	r.check(t, "k_two_sided_exact", NormalToleranceTwoSided(n, b, g))
	r.check(t, "k_one_sided_95_95_n10", NormalToleranceOneSided(10, 0.95, 0.95))
	r.check(t, "k_one_sided_95_95_n30", NormalToleranceOneSided(30, 0.95, 0.95))
	assert.True(t, math.IsNaN(NormalToleranceOneSided(1, 0.95, 0.95)))
}
