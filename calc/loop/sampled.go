package loop

import (
	"math"

	"railproof/calc/statespace"
)

// Sampled is the exact small-signal model: the map of a small deviation from one
// decision of the comparator to the next, linearised about the periodic solution.
// Its workspace is reused by Set; one per goroutine.
//
// Let x be the deviation of the joint state as a comparator decides at the
// nominal instant, and δ the delay of its decision:
//
//	δ     = (vc - Ri i)/slope,  slope = d/dt (ramp + Ri i - vc) at the crossing
//	x+    = P Φ x + P Φ' (f_on - f_off) δ
//
// where Φ carries x through the window, Φ' from the turn-off on, f_on - f_off is
// the jump of the state's rate at the turn-off, P hands each phase's current to
// the phase before it, and a current that comes to rest loses its deviation.
// The ripple of the control voltage is part of the slope. All of it is exact for
// equal phases; unequal ones are replaced by their mean.
//
// Source: linearisation of the switched system at its crossing instants, as in
// any text on sampled-data models of converters. Checked against injection into
// the switched circuit in package transient.
type Sampled struct {
	Status   Status
	Error    float64 // [1] output error of a finite-gain amplifier: reference needed over reference, less 1
	Slope    float64 // [V/s] at which the comparator's inputs cross
	plant    Plant
	joint    Joint
	window   window
	maps     [maxSegments]statespace.Map
	systems  [maxSegments]statespace.System
	config   [maxSegments]int // the first segment with the same switch states
	start    statespace.Point // periodic state as the comparator decides
	jump     statespace.Point // f_on - f_off at the turn-off
	open     statespace.Real  // P Φ: switches on schedule
	enter    statespace.Point // P Φ' (f_on - f_off)
	control  statespace.Functional
	inner    statespace.Real // current loop closed, voltage loop open
	closed   statespace.Real // everything closed
	transfer statespace.Transfer
	scratch  statespace.Map
	whole    statespace.Map
	matrix   statespace.Real
	response workspace
	scan     scan
	spare    statespace.Transfer
}

// Status tells how far a loop model could be set up.
type Status uint8

const (
	NotRun        Status = iota
	Analysed             // the periodic solution exists and was linearised
	NoComparison         // the control voltage's ripple outruns the ramp: the comparator has no clean crossing
	SingularPoint        // the periodic equations have no unique solution
	TooStiff             // a time constant is too short against the period to be carried through it
	NotConverged         // the eigenvalues did not settle
	NotRegulating        // drop-out, least on-time or a failed solve: there is no loop to analyse
)

// OK reports whether the model can be used.
func (s Status) OK() bool { return s == Analysed }

// Set linearises the plant, which must have passed Check, about its periodic
// solution.
func (s *Sampled) Set(p *Plant) Status {
	s.plant = *p
	if c := &s.plant.Circuit; c.Legs != nil {
		c.Leg, c.Legs = p.average(), nil
	}
	s.joint = Joint{}
	s.joint.Set(&s.plant, Limits{})
	s.window.set(&s.plant)
	if !s.propagate() {
		s.Status = TooStiff
		return s.Status
	}
	if !s.settle() {
		s.Status = SingularPoint
		return s.Status
	}
	s.linearise()
	switch {
	case !(s.Slope > 0):
		s.Status = NoComparison
	default:
		s.Status = Analysed
	}
	return s.Status
}

// propagate fills the segments' systems and maps and their product over the
// window, as a map of the whole point.
func (s *Sampled) propagate() bool {
	j, w := &s.joint, &s.window
	s.whole.Identity(j.N, Inputs)
	for k := range w.count {
		g := &w.segment[k]
		s.config[k] = k
		for i := range k {
			if w.segment[i].legs == g.legs {
				s.config[k] = s.config[i]
				break
			}
		}
		if s.config[k] == k {
			j.Assemble(&s.systems[k], &g.legs, Linear)
		}
		if !s.maps[k].Exp(&s.systems[s.config[k]], g.time, &s.scratch) {
			return false
		}
		s.scratch.Compose(&s.maps[k], &s.whole)
		copyMap(&s.whole, &s.scratch)
		if g.ends == comesToRest {
			width := j.N + Inputs
			clear(s.whole.F[g.phase*width : (g.phase+1)*width])
		}
	}
	return true
}

// copyMap copies the used part of a map.
func copyMap(dst, src *statespace.Map) {
	dst.N, dst.M, dst.Time, dst.Rate = src.N, src.M, src.Time, src.Rate
	used := src.N * (src.N + src.M)
	copy(dst.F[:used], src.F[:used])
}

// settle solves for the periodic state and the reference voltage that belongs to
// it: the window must close, and the comparator must decide where it does. Taking
// the reference as unknown keeps the equations regular for an ideal integrator.
func (s *Sampled) settle() bool {
	j := &s.joint
	n, width := j.N, j.N+Inputs
	rotate(s.whole.F[:n*width], width, j.Circuit.Phases)
	s.start = statespace.Point{}
	u := &s.start
	u[n+InputLoad], u[n+InputVoltage], u[n+InputOne] = j.Circuit.Current, j.Circuit.Vin, 1

	m, b := &s.matrix, statespace.Point{}
	m.N = n + 1
	for i := range n {
		row := s.whole.F[i*width : (i+1)*width]
		for k := range n {
			x := -row[k]
			if k == i {
				x++
			}
			m.Set(i, k, x)
		}
		m.Set(i, n, -row[n+InputReference])
		b[i] = float64(row[n+InputLoad]*u[n+InputLoad]) + float64(row[n+InputVoltage]*u[n+InputVoltage]) + row[n+InputOne]
	}
	if !s.plant.Compensator.Present {
		s.control = statespace.Functional{}
		m.N = n
		s.compact(n)
		ok := m.Solve(&b)
		copy(u[:n], b[:n])
		return ok
	}
	s.control = j.Control(Linear)
	for k := range n {
		m.Set(n, k, s.control[k])
	}
	m.Set(n, 0, s.control[0]-s.plant.sense())
	m.Set(n, n, s.control[n+InputReference])
	decide := s.plant.Duty*j.Circuit.Period - s.plant.Modulator.Delay
	b[n] = s.plant.RampSlope()*decide - s.control[n+InputLoad]*u[n+InputLoad] - s.control[n+InputVoltage]*u[n+InputVoltage] - s.control[n+InputOne]
	if !m.Solve(&b) {
		return false
	}
	copy(u[:n], b[:n])
	u[n+InputReference] = b[n]
	s.Error = b[n]/s.plant.Feedback.Reference - 1
	return true
}

// compact closes up the rows of the matrix from n+1 to n columns.
func (s *Sampled) compact(n int) {
	for i := 1; i < n; i++ {
		copy(s.matrix.A[i*n:i*n+n], s.matrix.A[i*(n+1):i*(n+1)+n])
	}
}

// linearise fills the crossing's slope, the jump, and the matrices of the open,
// the inner and the closed loop.
func (s *Sampled) linearise() {
	j, w := &s.joint, &s.window
	n, width := j.N, j.N+Inputs

	var rate statespace.Point
	s.systems[0].Derivative(&rate, &s.start)
	s.Slope = s.plant.RampSlope() + s.plant.sense()*rate[0] - s.control.Slope(&s.systems[0], &rate)

	z := s.start
	s.enter = statespace.Point{}
	for k := range w.count {
		var next statespace.Point
		s.maps[k].Apply(&next, &z)
		z = next
		s.carry(&s.maps[k], &s.enter)
		switch w.segment[k].ends {
		case turnsOff:
			var before, after statespace.Point
			s.systems[s.config[k]].Derivative(&before, &z)
			s.systems[s.config[k+1]].Derivative(&after, &z)
			for i := range n {
				s.jump[i] = before[i] - after[i]
			}
			s.enter = s.jump
		case comesToRest:
			z[w.segment[k].phase], s.enter[w.segment[k].phase] = 0, 0
		}
	}
	rotate(s.enter[:], 1, j.Circuit.Phases)

	s.open.N, s.inner.N, s.closed.N = n, n, n
	sense := s.plant.sense()
	for i := range n {
		row := s.whole.F[i*width : i*width+n]
		enter := s.enter[i] / s.Slope
		for k := range n {
			s.open.Set(i, k, row[k])
			x := row[k]
			if k == 0 {
				x -= float64(enter * sense)
			}
			s.inner.Set(i, k, x)
			s.closed.Set(i, k, x+float64(enter*s.control[k]))
		}
	}
	var column, row statespace.Point
	for i := range n {
		column[i], row[i] = s.enter[i]/s.Slope, -s.control[i]
	}
	s.transfer.Reduce(&s.inner, &column, &row)
}

// carry moves a deviation through a map, inputs unchanged.
func (s *Sampled) carry(m *statespace.Map, x *statespace.Point) {
	n, width := m.N, m.N+m.M
	var next statespace.Point
	for i := range n {
		sum := 0.0
		row := m.F[i*width : i*width+n]
		for k, a := range row {
			sum += float64(a * x[k])
		}
		next[i] = sum
	}
	copy(x[:n], next[:n])
}

// Loop returns the loop gain at a frequency [Hz], exact for signals sampled as
// the comparator decides; it repeats beyond Plant.Nyquist.
func (s *Sampled) Loop(frequency float64) complex128 {
	sin, cos := math.Sincos(2 * math.Pi * frequency * s.window.length)
	return s.transfer.At(complex(cos, sin))
}

// Instant is the periodic solution at the instant a comparator decides.
type Instant struct {
	State [statespace.MaxStates]float64 // [any] states of the joint system, without integral and tone
	Legs  Legs                          // phase 0 is about to turn off
	At    float64                       // [s] after the clock of phase 0
}

// Decision returns the periodic solution as the comparator of phase 0 decides.
func (s *Sampled) Decision() Instant {
	d := Instant{Legs: s.window.segment[0].legs, At: s.plant.Duty*s.plant.Circuit.Period - s.plant.Modulator.Delay}
	copy(d.State[:s.joint.N], s.start[:s.joint.N])
	return d
}
