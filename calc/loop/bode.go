package loop

import (
	"math"
	"math/cmplx"

	"railproof/calc/parts"
)

// Bode is both models at one frequency.
type Bode struct {
	Frequency float64 // [Hz]
	Averaged  Transfers
	Sampled   Transfers
	Deviation float64 // [1] of the averaged model, see Deviation
}

// Sweep fills dst with both models at the frequencies, which lie above zero. dst
// is as long as frequencies.
func (s *Sampled) Sweep(a *Averaged, frequencies []float64, dst []Bode) {
	bare := s.bare()
	for i, f := range frequencies {
		b := &dst[i]
		b.Frequency, b.Averaged, b.Sampled = f, a.At(f), s.At(f)
		b.Deviation = bare.deviation(&b.Averaged, &b.Sampled, f)
	}
}

// bare is the exact model of the stage without its compensator, whose ripple at
// the comparator the averaged model knows nothing of.
type bare struct{ stage *Sampled }

func (s *Sampled) bare() bare {
	if s.plant.Modulator.Mode == parts.VoltageMode {
		return bare{} // from duty ratio to output the comparator plays no part
	}
	p := s.plant
	p.Compensator.Present = false
	b := bare{new(Sampled)}
	b.stage.Set(&p)
	return b
}

// deviation returns the relative distance of the averaged stage from the exact
// one, |averaged/exact - 1|: duty ratio to output in voltage mode, control voltage
// to output in peak current mode.
func (b bare) deviation(averaged, exact *Transfers, frequency float64) float64 {
	if b.stage != nil {
		return cmplx.Abs(averaged.Control/b.stage.At(frequency).Control - 1)
	}
	return cmplx.Abs(averaged.Duty/exact.Duty - 1)
}

// Agreement tells how far the averaged model can be trusted.
type Agreement struct {
	Thousandth float64 // [1] deviation at a thousandth of the switching frequency
	Hundredth  float64 // [1] at a hundredth
	Tenth      float64 // [1] at a tenth
	GoodTo     float64 // [Hz] up to which the deviation stays within 10 %
}

const (
	agreementWithin = 0.1 // [1]
	agreementPoints = 96  // [1] from a thousandth of the switching frequency to half the decision rate
)

// Agreement compares the averaged model of the same plant with the exact one.
func (s *Sampled) Agreement(a *Averaged) Agreement {
	fs := 1 / s.plant.Circuit.Period
	bare := s.bare()
	at := func(f float64) float64 {
		x, y := a.At(f), s.At(f)
		return bare.deviation(&x, &y, f)
	}
	g := Agreement{Thousandth: at(1e-3 * fs), Hundredth: at(1e-2 * fs), Tenth: at(0.1 * fs)}
	step := math.Pow(s.plant.Nyquist()/(1e-3*fs), 1.0/agreementPoints)
	f := 1e-3 * fs
	for range agreementPoints {
		if !(at(f) <= agreementWithin) {
			break
		}
		g.GoodTo = f
		f *= step
	}
	return g
}

// Frequencies fills dst with a logarithmic grid from one frequency to another.
func Frequencies(dst []float64, from, to float64) {
	n := len(dst)
	for i := range dst {
		dst[i] = from * math.Pow(to/from, float64(i)/float64(max(1, n-1)))
	}
}

// UnwrappedDeg fills dst with the phases of the gains, each on the branch nearest
// to the one before; the first lies in (-270°, 90°], where the phase of a loop
// gain with an integrator begins.
func UnwrappedDeg(dst []float64, gains []complex128) {
	for i, g := range gains {
		p := degrees(cmplx.Phase(g))
		if i == 0 {
			if p > 90 {
				p -= 360
			}
			dst[i] = p
			continue
		}
		dst[i] = dst[i-1] + wrapDeg(p-dst[i-1])
	}
}
