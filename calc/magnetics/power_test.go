package magnetics

import (
	"math"
	"math/rand/v2"
	"testing"
)

func TestPowerKernels(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 2))
	worstLog, worstPow := 0.0, 0.0
	for range 200_000 {
		y := 40 * (2*rng.Float64() - 1)
		x := math.Exp2(y)
		want := math.Log2(x)
		if d := math.Abs(binaryLog(x)-want) / math.Max(1, math.Abs(want)); d > worstLog {
			worstLog = d
		}
		if d := math.Abs(binaryPower(y)/x - 1); d > worstPow {
			worstPow = d
		}
	}
	if worstLog > 4.5e-16 || worstPow > 4.5e-16 {
		t.Errorf("worst error of the logarithm %.3g, of the power %.3g", worstLog, worstPow)
	}
	for _, y := range []float64{-1100, -1000, -999.9, -1, 0, 1, 999.9, 1000, 1e9} {
		if got, want := binaryPower(y), math.Exp2(y); math.Abs(got-want) > 1e-15*want {
			t.Errorf("binaryPower(%g): got %g, want %g", y, got, want)
		}
	}
}

func BenchmarkTriangleDensity(b *testing.B) {
	t := PrepareTriangle(1.4, 2.4)
	t.At(1.9, 500e3)
	sink, swing := 0.0, 0.07
	for b.Loop() {
		sink += t.Density(swing, 0.2, 0.8)
	}
	_ = sink
}
