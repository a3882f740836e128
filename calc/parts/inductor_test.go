package parts

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/integrate/quad"
	"pgregory.net/rapid"

	"railproof/calc/internal/calctest"
)

// saturating has the curve of the contract's example.
func saturating() *Inductor {
	return &Inductor{Inductance: 6.8e-6, InductanceAtCurrent: table(0, 1, 8, 0.95, 14, 0.7)}
}

func TestIncrementalInductance(t *testing.T) {
	l := saturating()
	for _, c := range []struct {
		name    string
		i, want float64
	}{
		{"no current", 0, 1},
		{"between points", 12, 0.95 - 0.25*4/6},
		{"reversed", -12, 0.95 - 0.25*4/6},
		{"falls on beyond the end", 20, 0.7 - 0.25*6/6},
		{"floor", 40, 0.1},
	} {
		calctest.Close(t, c.name, l.IncrementalAt(c.i)/l.Inductance, c.want, 1e-12)
	}
	late := &Inductor{Inductance: 1e-6, InductanceAtCurrent: table(4, 0.9, 8, 0.6)}
	calctest.Close(t, "constant below the first point", late.IncrementalAt(1), 0.9e-6, 1e-12)
}

// integrate sums f over [a, b] in pieces short against the table's segments.
func integrate(f func(float64) float64, a, b float64) float64 {
	if b < a {
		return -integrate(f, b, a)
	}
	sum, n := 0.0, 2000
	for i := range n {
		lo, hi := a+(b-a)*float64(i)/float64(n), a+(b-a)*float64(i+1)/float64(n)
		sum += quad.Fixed(f, lo, hi, 3, nil, 0)
	}
	return sum
}

func TestFluxIsIntegralOfInductance(t *testing.T) {
	curves := map[string]*Inductor{
		"example":     saturating(),
		"one point":   {Inductance: 1e-6, InductanceAtCurrent: table(5, 0.8)},
		"late start":  {Inductance: 1e-6, InductanceAtCurrent: table(4, 0.9, 8, 0.6)},
		"below floor": {Inductance: 1e-6, InductanceAtCurrent: table(0, 1, 5, 0.06)},
		"linear":      {Inductance: 1e-6},
	}
	for name, l := range curves {
		t.Run(name, func(t *testing.T) {
			for _, i := range []float64{-45, -9, -1, 0.5, 6, 8, 14, 20, 29, 60} {
				calctest.Close(t, "flux", l.FluxLinkage(i), integrate(l.IncrementalAt, 0, i), 1e-6)
				calctest.Close(t, "energy", l.StoredEnergy(i), integrate(func(x float64) float64 { return x * l.IncrementalAt(x) }, 0, i), 1e-6)
				calctest.Close(t, "inverse", l.CurrentAtFlux(l.FluxLinkage(i)), i, 1e-9)
			}
			for _, s := range [][2]float64{{2, 5}, {5, 11}, {-3, 9}, {-12, -2}, {10, 40}, {30, 50}} {
				want := integrate(l.IncrementalAt, s[0], s[1]) / (s[1] - s[0])
				calctest.Close(t, "mean inductance", l.InductanceOver(s[0], s[1]), want, 1e-6)
			}
			calctest.Close(t, "vanishing swing", l.InductanceOver(9, 9), l.IncrementalAt(9), 1e-12)
		})
	}
}

// TestSwingHoldsMeanAndFlux samples i(λ) over a triangular flux.
func TestSwingHoldsMeanAndFlux(t *testing.T) {
	l := saturating()
	for _, c := range []struct {
		name       string
		mean, flux float64
	}{
		{"within one segment", 4, 1e-5},
		{"over a point", 8, 2e-5},
		{"through zero", 0.5, 2e-5},
		{"reversed", -9, 2e-5},
		{"into the floor", 24, 3e-5},
	} {
		t.Run(c.name, func(t *testing.T) {
			valley, peak := l.SwingAbout(c.mean, c.flux)
			start := l.FluxLinkage(valley)
			calctest.Close(t, "flux", l.FluxLinkage(peak)-start, c.flux, 1e-9)
			const n = 20000
			sum := 0.0
			for k := range n {
				sum += l.CurrentAtFlux(start + c.flux*(float64(k)+0.5)/n)
			}
			calctest.Close(t, "mean current", sum/n, c.mean, 1e-7)
		})
	}
}

// TestSwingOnExampleCurve holds the figures stated with the contract: at 12 A and
// 200 kHz the inductance at zero current gives a ripple 22 % low, that at the
// peak 11 % high, that at the mean current within half a per cent.
func TestSwingOnExampleCurve(t *testing.T) {
	l := saturating()
	flux := 5 * (1 - 5.0/24) / 200e3
	valley, peak := l.SwingAbout(12, flux)
	exact := peak - valley
	calctest.Within(t, "at zero current", flux/l.Inductance/exact-1, -0.22, 0.005)
	calctest.Within(t, "at the peak", flux/l.IncrementalAt(peak)/exact-1, 0.11, 0.005)
	calctest.Within(t, "at the mean", flux/l.IncrementalAt(12)/exact-1, 0, 0.005)
	calctest.Close(t, "mean over the swing", flux/l.InductanceOver(valley, peak), exact, 1e-12)
}

func TestSwingProperties(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		x1 := rapid.Float64Range(0.5, 10).Draw(t, "x1")
		x2 := x1 + rapid.Float64Range(0.5, 10).Draw(t, "dx")
		y1 := rapid.Float64Range(0.3, 1).Draw(t, "y1")
		y2 := rapid.Float64Range(0.05, 0.99).Draw(t, "y2") * y1
		l := &Inductor{Inductance: 1e-6, InductanceAtCurrent: table(0, 1, x1, y1, x2, y2)}
		mean := rapid.Float64Range(-30, 30).Draw(t, "mean")
		flux := rapid.Float64Range(1e-9, 3e-5).Draw(t, "flux")
		valley, peak := l.SwingAbout(mean, flux)
		if !(valley < mean && mean < peak) {
			t.Fatalf("mean %g outside swing %g to %g", mean, valley, peak)
		}
		got := l.FluxLinkage(peak) - l.FluxLinkage(valley)
		if math.Abs(got-flux) > 1e-9*flux+1e-14*math.Abs(l.FluxLinkage(peak)) {
			t.Fatalf("flux %g, want %g", got, flux)
		}
		if w := peak - valley; w < flux/l.Inductance*(1-1e-9) {
			t.Fatalf("saturation must not shrink the swing: %g below %g", w, flux/l.Inductance)
		}
	})
}

func TestModelsDoNotAllocate(t *testing.T) {
	l := saturating()
	if n := testing.AllocsPerRun(100, func() { l.SwingAbout(12, 2e-5); l.InductanceOver(-2, 20); l.CurrentAtFlux(5e-5) }); n != 0 {
		t.Errorf("%v allocations", n)
	}
}

func BenchmarkInductor(b *testing.B) {
	l := saturating()
	b.Run("swing/in-segment", func(b *testing.B) {
		for b.Loop() {
			l.SwingAbout(6, 8e-6)
		}
	})
	b.Run("swing/across-a-point", func(b *testing.B) {
		for b.Loop() {
			l.SwingAbout(8, 8e-6)
		}
	})
	b.Run("inductance", func(b *testing.B) {
		for b.Loop() {
			l.InductanceOver(5.4, 6.6)
		}
	})
}
