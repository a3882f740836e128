package loop

import (
	"math"

	"railproof/calc/statespace"
	"railproof/calc/switched"
)

// Sampled is the exact small-signal model: the map of a small deviation over the
// window after which the stage repeats itself, linearised about the periodic
// solution. Its workspace is reused by Set; one per goroutine.
//
// Let x be the deviation of the joint state as the window starts, and δk the delay
// of the k-th comparator's decision in it:
//
//	δk    = (vc - Ri i)/slope,  slope = d/dt (ramp + Ri i - vc) at the crossing
//	x+    = P Φ x + sum of P Φk (f_on - f_off) δk
//
// where vc and i are the deviations of control voltage and phase current at the
// decision, earlier delays included, Φ carries x through the window, Φk from the
// k-th turn-off on, f_on - f_off is the jump of the state's rate at the turn-off,
// and a current that comes to rest loses its deviation. With N equal phases the
// window is an N-th of the period and has one decision; P hands each phase's current
// to the phase before it. With unequal phases it is the period, with N decisions,
// and P is one. The ripple of the control voltage is part of the slope. All of it is
// exact.
//
// Source: linearisation of the switched system at its crossing instants, as in
// any text on sampled-data models of converters. Checked against injection into
// the switched circuit in package transient.
type Sampled struct {
	Status    Status
	Error     float64 // [1] output error of a finite-gain amplifier: reference needed over reference, less 1
	Slope     float64 // [V/s] at which the comparator's inputs cross; the least of unequal phases
	Peak      float64 // [A] greatest current of a phase as its comparator decides
	plant     Plant
	legs      [switched.MaxPhases]switched.Leg // what the plant's point to
	joint     Joint
	window    window
	instants  instants         // of unequal phases
	stretches []stretch        // one for each segment of the window
	start     statespace.Point // periodic state as the window starts
	decisions [switched.MaxPhases]decision
	rests     [switched.MaxPhases]rest
	count     int             // of decisions in the window
	open      statespace.Real // P Φ: switches on schedule
	control   statespace.Functional
	inner     statespace.Real // current loop closed, voltage loop open
	closed    statespace.Real // everything closed
	transfer  statespace.Transfer
	lift      lifted
	scratch   statespace.Map
	whole     statespace.Map
	matrix    statespace.Real
	response  workspace
	scan      scan
	spare     statespace.Transfer
}

// stretch is what the model keeps of a segment.
type stretch struct {
	config    int // the first segment with the same switch states, which has the system
	exact     statespace.Map
	system    statespace.System
	resolvent statespace.Complex      // (jw I - A), stage only, factored
	observe   statespace.ComplexPoint // output row times its inverse
	forced    statespace.ComplexPoint // periodic response to the excitation
	turn      complex128              // e^{jwt} as the segment ends
}

// decision is one decision of a comparator in the window.
type decision struct {
	phase   int
	at      float64                     // [s] after the window's start
	since   float64                     // [s] after the phase's clock
	slope   float64                     // [V/s] at which the comparator's inputs cross
	control statespace.Functional       // control voltage there, by the point at the window's start, switches on schedule
	current statespace.Functional       // current of the phase, likewise
	jump    statespace.Point            // f_on - f_off at the turn-off
	enter   statespace.Point            // by which a delay of it moves the end of the window [1/s]
	voltage [switched.MaxPhases]float64 // [V/s] by which the delay of an earlier decision moves the control voltage here
	amperes [switched.MaxPhases]float64 // [A/s] and the current
}

// rest is where the current of an unequal phase comes to rest, or might.
type rest struct {
	current statespace.Functional       // there, before it is held at zero, by the point at the window's start
	delayed [switched.MaxPhases]float64 // [A/s] by which the delay of a decision moves it
	left    float64                     // [A] what it is there, zero once the instant is found
	fall    float64                     // [A/s] at which it falls there
	off     float64                     // [A] as the high side turns off
	valley  float64                     // [A] as it turns on
}

// Status tells how far a loop model could be set up.
type Status uint8

const (
	NotRun        Status = iota
	Analysed             // the periodic solution exists and was linearised
	NoComparison         // the control voltage's ripple outruns the ramp: the comparator has no clean crossing
	SingularPoint        // the periodic equations have no unique solution
	TooStiff             // a time constant is too short against the period to be carried through it
	NotConverged         // switching instants or eigenvalues were not found
	NotRegulating        // drop-out, least on-time or a failed solve: there is no loop to analyse
)

// OK reports whether the model can be used.
func (s Status) OK() bool { return s == Analysed }

// Set linearises the plant, which must have passed Check, about its periodic
// solution.
func (s *Sampled) Set(p *Plant) Status {
	s.plant = *p
	s.Status = s.set()
	return s.Status
}

func (s *Sampled) set() Status {
	var status Status
	if s.unequal() {
		if status = s.seek(); status.OK() {
			s.bind(&s.plant, false)
			s.window.lay(&s.plant, &s.instants)
			status = s.follow()
		}
	} else {
		status = s.alike()
	}
	if !status.OK() {
		return status
	}
	s.assemble()
	if !(s.Slope > 0) {
		return NoComparison
	}
	return Analysed
}

// unequal reports whether the phases differ. It takes them over, so that the plant
// no longer points to what its caller may change.
func (s *Sampled) unequal() bool {
	c := &s.plant.Circuit
	if c.Legs == nil {
		return false
	}
	s.legs = *c.Legs
	for k := range c.Phases {
		if s.legs[k] != s.legs[0] {
			c.Legs = &s.legs
			return true
		}
	}
	c.Leg, c.Legs = s.legs[0], nil
	return false
}

// Loop returns the loop gain at a frequency [Hz], exact for signals sampled as
// the comparators decide. With equal phases it repeats beyond Plant.Nyquist; with
// unequal ones it is that of lifted.
func (s *Sampled) Loop(frequency float64) complex128 {
	sin, cos := math.Sincos(2 * math.Pi * frequency * s.window.length)
	z := complex(cos, sin)
	if s.count == 1 {
		return s.transfer.At(z)
	}
	return s.lift.at(s, frequency, z)
}

// Instant is the periodic solution at the instant a comparator decides, with no
// other decision waiting for its delay.
type Instant struct {
	State [statespace.MaxStates]float64 // [any] states of the joint system, without integral and tone
	Legs  Legs
	Phase int     // whose comparator decides
	At    float64 // [s] after a clock of phase 0
	Quiet float64 // [s] after At, at which no decision waits for its delay
}

// Decision returns the periodic solution at the start of the window.
func (s *Sampled) Decision() Instant {
	w, c := &s.window, &s.plant.Circuit
	first := &s.decisions[0]
	d := Instant{Legs: w.segment[0].legs, Phase: first.phase, At: float64(first.phase)*c.Period/float64(c.Phases) + first.since}
	last := s.decisions[s.count-1].at + s.plant.Modulator.Delay
	d.Quiet = (last + w.length) / 2
	copy(d.State[:s.joint.N], s.start[:s.joint.N])
	return d
}
