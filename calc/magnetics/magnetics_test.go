package magnetics

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/integrate/quad"
	"pgregory.net/rapid"

	"railproof/calc/internal/calctest"
)

func integral(f func(float64) float64, a, b float64) float64 {
	sum, n := 0.0, 4000
	for i := range n {
		sum += quad.Fixed(f, a+(b-a)*float64(i)/float64(n), a+(b-a)*float64(i+1)/float64(n), 3, nil, 0)
	}
	return sum
}

// TestCosineIntegral checks the gamma functions against the integral they stand
// for.
func TestCosineIntegral(t *testing.T) {
	for _, a := range []float64{1, 1.25, 1.4, 1.7, 2, 2.5} {
		want := 4 * integral(func(x float64) float64 { return math.Pow(math.Cos(x), a) }, 0, math.Pi/2)
		calctest.Close(t, "J", cosineIntegral(a), want, 1e-7)
	}
}

// TestGeneralisedEquationGivesSineLoss feeds the improved equation a sine in
// many straight pieces: ki is made so that the sine's own loss comes out.
func TestGeneralisedEquationGivesSineLoss(t *testing.T) {
	const f, b, n = 1e5, 0.1, 4000
	var times, flux [n + 1]float64
	for i := range times {
		times[i] = float64(i) / n / f
		flux[i] = b * math.Sin(2*math.Pi*float64(i)/n)
	}
	for _, s := range []Steinmetz{{1.9, 1.4, 2.4}, {0.3, 1.1, 2.8}, {2e-3, 1.95, 2.2}} {
		calctest.Close(t, "sine", s.PiecewiseDensity(times[:], flux[:]), s.SineDensity(f, b), 1e-5)
	}
}

func TestApproximationOfKI(t *testing.T) {
	worst := 0.0
	for a := 1.0; a <= 2; a += 0.01 {
		s := Steinmetz{1, a, 2.5}
		worst = max(worst, math.Abs(s.KIApproximate()/s.KI()-1))
	}
	calctest.Within(t, "worst error for alpha in [1, 2]", worst, 0.0009, 0.0001)
}

// TestTriangleAgainstPieces holds the closed form to the general one, and to a
// numerical integration of ki |dB/dt|^α ΔB^(β−α).
func TestTriangleAgainstPieces(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		s := Steinmetz{
			K:     rapid.Float64Range(1e-3, 50).Draw(t, "k"),
			Alpha: rapid.Float64Range(1, 2.2).Draw(t, "alpha"),
			Beta:  rapid.Float64Range(1.5, 3.2).Draw(t, "beta"),
		}
		f := rapid.Float64Range(2e4, 3e6).Draw(t, "f")
		swing := rapid.Float64Range(1e-4, 0.6).Draw(t, "swing")
		rise := rapid.Float64Range(0.02, 0.9).Draw(t, "rise")
		fall := rapid.Float64Range(0.05, 1).Draw(t, "of the rest") * (1 - rise)
		p := PrepareTriangle(s.Alpha, s.Beta)
		p.At(s.K, f)
		got := p.Density(swing, rise, fall)
		times := []float64{0, rise / f, (rise + fall) / f, 1 / f}
		flux := []float64{-swing / 2, swing / 2, -swing / 2, -swing / 2}
		if rise+fall >= 1-1e-12 {
			times, flux = times[:3], flux[:3]
			times[2] = 1 / f
		}
		if want := s.PiecewiseDensity(times, flux); math.Abs(got/want-1) > 1e-11 {
			t.Fatalf("%g, pieces give %g", got, want)
		}
		slope := func(d float64) float64 { return d * math.Pow(swing*f/d, s.Alpha) }
		if want := s.KI() * math.Pow(swing, s.Beta-s.Alpha) * (slope(rise) + slope(fall)); math.Abs(got/want-1) > 1e-11 {
			t.Fatalf("%g, integral of the slopes %g", got, want)
		}
	})
}

// TestManyPiecesAreOneTriangle: cutting straight pieces does not change the loss.
func TestManyPiecesAreOneTriangle(t *testing.T) {
	s := Steinmetz{1.9, 1.4, 2.4}
	whole := s.PiecewiseDensity([]float64{0, 3, 10}, []float64{-1, 1, -1})
	cut := s.PiecewiseDensity([]float64{0, 1, 3, 6, 10}, []float64{-1, -1.0 / 3, 1, 1.0 / 7, -1})
	calctest.Close(t, "cut", cut, whole, 1e-12)
}

func TestNoFluxNoLoss(t *testing.T) {
	p := PrepareTriangle(1.4, 2.4)
	p.At(1.9, 5e5)
	for _, c := range [][3]float64{{0, 0.3, 0.7}, {0.1, 0, 1}, {0.1, 1, 0}} {
		if d := p.Density(c[0], c[1], c[2]); d != 0 {
			t.Errorf("swing %g, rise %g, fall %g: %g", c[0], c[1], c[2], d)
		}
	}
	if d := (Steinmetz{1.9, 1.4, 2.4}).PiecewiseDensity([]float64{0, 1, 2}, []float64{0.1, 0.1, 0.1}); d != 0 {
		t.Errorf("constant flux: %g", d)
	}
}

func TestCoreLossRisesWithSwingAndFrequency(t *testing.T) {
	p := PrepareTriangle(1.4, 2.4)
	p.At(1.9, 5e5)
	slow := p.Density(0.1, 0.2, 0.8)
	if more := p.Density(0.11, 0.2, 0.8); !(more > slow) {
		t.Errorf("more flux: %g to %g", slow, more)
	}
	p.At(1.9, 6e5)
	if more := p.Density(0.1, 0.2, 0.8); !(more > slow) {
		t.Errorf("faster: %g to %g", slow, more)
	}
}

// TestMistakesAreAbsurd: the two usual mistakes with k lead far off, and k_i
// typed as k beyond what a core survives at a common working point.
func TestMistakesAreAbsurd(t *testing.T) {
	s := FromKI(0.42941, 1.3697, 2.4634)
	if ratio := s.K / 0.42941; ratio < 10 || ratio > 20 {
		t.Errorf("k over k_i: %g, expected about 15", ratio)
	}
	if ratio := s.SineDensity(1e5, 0.2) / s.SineDensity(1e5, 0.1); ratio < 5 || ratio > 6 {
		t.Errorf("peak to peak for amplitude: %g, expected about 5", ratio)
	}
	sane := s.SineDensity(1e5, 0.1)
	if !(sane < AbsurdDensity && 1e3*sane > AbsurdDensity) {
		t.Errorf("%g W/m3 must be sane, and absurd with kW taken for W", sane)
	}
}

func TestFluxSwing(t *testing.T) {
	calctest.Close(t, "volt-seconds", FluxSwing(5*(1-5.0/24)/500e3, 9, 2.1e-5), 5*(1-5.0/24)/500e3/(9*2.1e-5), 1e-15)
}

func TestDensityDoesNotAllocate(t *testing.T) {
	p := PrepareTriangle(1.4, 2.4)
	if n := testing.AllocsPerRun(100, func() { p.At(1.9, 5e5); p.Density(0.1, 0.2, 0.8) }); n != 0 {
		t.Errorf("%v allocations", n)
	}
}
