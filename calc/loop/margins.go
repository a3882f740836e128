package loop

import (
	"math"
	"math/cmplx"

	"railproof/calc/parts"
	"railproof/calc/statespace"
)

// Stability is the verdict of the closed loop's eigenvalues.
type Stability uint8

const (
	Undecided Stability = iota
	Stable              // every eigenvalue of the closed-loop map lies inside the unit circle
	Unstable            // one does not
)

// Crossed tells whether the loop gain passes through 1.
type Crossed uint8

const (
	NoSearch    Crossed = iota
	Crosses             // it falls through 1 at least once
	AlwaysBelow         // the loop gain is below 1 everywhere
	AlwaysAbove         // it is above 1 up to half the decision rate
	OnlyRises           // it ends above 1 after a rise, without a fall
)

const (
	MaxCrossovers     = 12 // [1] crossings kept; more are counted only
	MaxPhaseCrossings = 12 // [1]
)

// Crossover is a frequency at which the loop gain is 1.
type Crossover struct {
	Frequency float64 // [Hz]
	Margin    float64 // [deg] 180° plus the phase of the loop gain, in (-180°, 180°]
	Falls     bool    // the gain falls through 1
}

// PhaseCrossing is a frequency at which the loop gain is negative real.
type PhaseCrossing struct {
	Frequency float64 // [Hz]
	Margin    float64 // [dB] -20 log |T|; negative where the gain is above 1
}

// Margins is the verdict on one loop. Whether it is stable is said by Stability
// alone; a margin describes how far it is from changing.
type Margins struct {
	Status          Status
	Stability       Stability
	SpectralRadius  float64    // [1] greatest modulus of the closed loop's eigenvalues, per decision; of unequal phases in the mean of a period's
	Dominant        complex128 // [1] that eigenvalue, over a window
	DominantAt      float64    // [Hz] its frequency of oscillation
	CurrentLoop     complex128 // [1] peak current mode: what is left of a disturbance of the current after one period; 0 in voltage mode
	Subharmonic     bool       // peak current mode: it alternates and does not settle
	Crossed         Crossed
	CrossoverCount  int
	Crossovers      [MaxCrossovers]Crossover
	PhaseCount      int
	PhaseCrossings  [MaxPhaseCrossings]PhaseCrossing
	Crossover       float64 // [Hz] highest at which the gain falls through 1; NaN: none
	PhaseMargin     float64 // [deg] least over all crossovers; NaN: no crossover
	GainMargin      float64 // [dB] least by which the gain may rise; NaN: no phase crossing with the gain below 1
	GainReduction   float64 // [dB] least by which it may fall; NaN: no phase crossing with the gain above 1
	Modulus         float64 // [1] least |1 + T|
	ModulusAt       float64 // [Hz]
	Bandwidth       float64 // [Hz] above which |T/(1+T)| stays 3 dB down; NaN: not below half the decision rate
	Conditional     bool    // stable, but a lower gain is not
	LowestFrequency float64 // [Hz] at which the search began
	Nyquist         float64 // [Hz] at which it ended
}

// Margins analyses the sampled-data loop. It allocates nothing.
func (s *Sampled) Margins(m *Margins) {
	*m = Margins{Status: s.Status, Crossover: math.NaN(), PhaseMargin: math.NaN(), GainMargin: math.NaN(), GainReduction: math.NaN(), Modulus: math.NaN(), ModulusAt: math.NaN(), Bandwidth: math.NaN()}
	if !s.Status.OK() {
		return
	}
	if !s.decide(m) {
		m.Status = NotConverged
		return
	}
	m.search(s, &s.scan)
}

// decide finds the eigenvalues of the current loop and of the closed loop, and
// collects the frequencies around which the loop gain may change quickly.
func (s *Sampled) decide(m *Margins) bool {
	j := &s.joint
	var e statespace.ComplexPoint
	nyquist := s.plant.Nyquist()
	m.Nyquist, m.LowestFrequency = nyquist, nyquist/searchSpan
	s.scan.reset(nyquist)

	if s.plant.Modulator.Mode == parts.PeakCurrentMode {
		if !s.eigenvalues(&s.inner, j.Network, &e) {
			return false
		}
		m.currentLoop(s, &e)
	}
	open := &s.transfer
	if s.count > 1 {
		open = s.reduce(&s.inner, j.N)
	}
	if !open.Eigenvalues(&e) {
		return false
	}
	s.around(&e)
	if !s.eigenvalues(&s.closed, j.N, &e) {
		return false
	}
	s.around(&e)
	m.Dominant = largest(&e, j.N)
	m.SpectralRadius = math.Pow(cmplx.Abs(m.Dominant), 1/float64(s.count))
	m.DominantAt = s.heard(m.Dominant)
	m.Stability = Unstable
	if m.SpectralRadius < 1 {
		m.Stability = Stable
	}
	return true
}

// currentLoop picks the current loop's eigenvalue from those of the stage with its
// current loop closed: per period, the one nearest to what the slopes alone give, of
// unequal phases those of the least damped one.
func (m *Margins) currentLoop(s *Sampled, e *statespace.ComplexPoint) {
	ideal := complex(s.plant.CurrentLoop().Eigenvalue, 0)
	nearest := math.Inf(1)
	for _, x := range e[:s.joint.Network] {
		period := complex128(1)
		for range s.window.places {
			period *= x
		}
		if d := cmplx.Abs(period - ideal); d < nearest {
			nearest, m.CurrentLoop = d, period
		}
		if cmplx.Abs(x) >= 1 && real(period) < 0 {
			m.Subharmonic = true
		}
	}
}

// around sets grid points about the eigenvalues of a map.
func (s *Sampled) around(e *statespace.ComplexPoint) {
	for _, x := range e[:s.joint.N] {
		if s.count == 1 && !(imag(x) > 0) {
			continue
		}
		width := math.Abs(math.Log(cmplx.Abs(x))) / (2 * math.Pi * s.window.length)
		s.images(x, func(f float64) { s.scan.around(f, width) })
	}
}

// heard returns the frequency at which an eigenvalue oscillates [Hz]; of several that
// it may have, with unequal phases, the one at which the control voltage shows it
// most.
func (s *Sampled) heard(x complex128) float64 {
	at, nearest := math.NaN(), math.Inf(1)
	s.images(x, func(f float64) {
		d := 0.0
		if s.count > 1 {
			// Beside the eigenvalue: at it, every one of them is without bound.
			d = cmplx.Abs(1 + s.lift.at(s, f, x*complex(beside, 0)))
		}
		if d < nearest {
			at, nearest = math.Abs(f), d
		}
	})
	return at
}

const beside = 1.1 // [1] of an eigenvalue's modulus

// eigenvalues sets e to the eigenvalues of the leading n rows and columns of a.
func (s *Sampled) eigenvalues(a *statespace.Real, n int, e *statespace.ComplexPoint) bool {
	return s.reduce(a, n).Eigenvalues(e)
}

// reduce returns the Hessenberg form of the leading n rows and columns of a.
func (s *Sampled) reduce(a *statespace.Real, n int) *statespace.Transfer {
	s.matrix.N = n
	for i := range n {
		copy(s.matrix.A[i*n:i*n+n], a.A[i*a.N:i*a.N+n])
	}
	var none statespace.Point
	s.spare.Reduce(&s.matrix, &none, &none)
	return &s.spare
}

func largest(e *statespace.ComplexPoint, n int) complex128 {
	best := complex128(0)
	for _, x := range e[:n] {
		// Of a conjugate pair the one above the axis, whichever was found first.
		if a, b := cmplx.Abs(x), cmplx.Abs(best); a > b*(1+1e-12) || a >= b*(1-1e-12) && imag(x) > imag(best) {
			best = x
		}
	}
	return best
}

// gain is a loop gain to be searched.
type gain interface {
	Loop(frequency float64) complex128
}

// Loop returns the averaged loop gain at a frequency [Hz].
func (a *Averaged) Loop(frequency float64) complex128 { return a.At(frequency).Loop }

// AveragedMargins searches the averaged loop gain of a plant whose sampled-data
// model was set, on the same frequencies. Stability remains undecided: the
// averaged model does not know it.
func (s *Sampled) AveragedMargins(a *Averaged, m *Margins) {
	var exact Margins
	s.decide(&exact)
	*m = Margins{Status: s.Status, Nyquist: exact.Nyquist, LowestFrequency: exact.LowestFrequency}
	m.search(a, &s.scan)
}
