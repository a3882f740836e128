package spread

import (
	"math"
	"testing"

	"github.com/stretchr/testify/assert"
	"gonum.org/v1/gonum/stat/distuv"
)

func TestNormalQuantileAgainstExact(t *testing.T) {
	worst, far := 0.0, 0.0
	for i := range 50000 {
		p := math.Exp2(-1 - 28.9*float64(i)/50000)
		got := normalQuantile(p)
		want := tailQuantile(p)
		if p > 1e-3 {
			want = distuv.UnitNormal.Quantile(p)
		}
		far = math.Max(far, math.Abs(got-want))
		if p >= 1e-7 {
			worst = math.Max(worst, math.Abs(got-want))
		}
	}
	for i := 1; i < 1<<10; i++ {
		p := math.Ldexp(float64(i), -25) // 1 - p is exact
		assert.Equal(t, -normalQuantile(p), normalQuantile(1-p), "symmetry at %g", p)
	}
	assert.Less(t, worst, 6e-9, "greatest error in standard deviations")
	assert.Less(t, far, 1e-7, "greatest error out to six standard deviations")
	assert.InDelta(t, 0, normalQuantile(0.5), 1e-15)
	assert.InDelta(t, -1.959963984540054, normalQuantile(0.025), 6e-9)
}

func TestTailQuantileInvertsTheTail(t *testing.T) {
	for _, q := range []float64{-3.1, -4, -5, -6, -7} {
		assert.InEpsilon(t, q, tailQuantile(normalBelow(q)), 1e-13)
	}
}

func TestNormalQuantileIsMonotonic(t *testing.T) {
	before := math.Inf(-1)
	for i := 1; i < 1_000_000; i++ {
		q := normalQuantile(float64(i) / 1_000_000)
		if q < before {
			t.Fatalf("falls at %d/1000000: %.17g after %.17g", i, q, before)
		}
		before = q
	}
}

func BenchmarkNormalQuantile(b *testing.B) {
	p, sum := 0.3, 0.0
	for b.Loop() {
		if p += 0.6180339887; p >= 1 {
			p--
		}
		sum += normalQuantile(p)
	}
	_ = sum
}
