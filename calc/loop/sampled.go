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

// follow finds the periodic state in the window laid out and what moves it.
func (s *Sampled) follow() Status {
	if !s.propagate() {
		return TooStiff
	}
	if !s.settle() {
		return SingularPoint
	}
	s.trace()
	return Analysed
}

// alike lays out the window of equal phases and finds the periodic state in it. Behind
// a source a current comes to rest a little earlier or later than from a stiff one.
func (s *Sampled) alike() Status {
	p := &s.plant
	s.bind(p, false)
	before := math.Inf(1)
	for range seekRounds {
		s.window.set(p)
		if status := s.follow(); !status.OK() || p.Mode != switched.Discontinuous {
			return status
		}
		r := &s.rests[s.window.resting]
		more := r.left / (r.fall * p.Circuit.Period)
		size := math.Abs(more)
		if size <= restWithin || size >= before/2 && size <= restEnough {
			return Analysed
		}
		before = size
		if p.Conduct += more; !(r.fall > 0 && p.Conduct > 0 && p.Duty+p.Conduct < 1) {
			break
		}
	}
	return NotConverged
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

// bind sets the joint system of a plant, with the integral of the output where asked
// for, and the control voltage in it. A stage without a compensator has a control
// voltage of its own, in the reference's place.
func (s *Sampled) bind(p *Plant, integrate bool) {
	s.joint = Joint{Integrate: integrate}
	s.joint.Set(p, Limits{})
	s.control = statespace.Functional{}
	if p.Compensator.Present {
		s.control = s.joint.Control(Linear)
	} else {
		s.control[s.joint.N+InputReference] = 1
	}
}

// propagate fills the segments' systems and maps and their product over the
// window, as a map of the whole point, and what the comparators see of it.
func (s *Sampled) propagate() bool {
	j, w := &s.joint, &s.window
	if len(s.stretches) < w.count {
		s.stretches = append(s.stretches, make([]stretch, w.count-len(s.stretches))...)
	}
	width := j.N + Inputs
	s.count = 0
	s.whole.Identity(j.N, Inputs)
	at := 0.0
	for k := range w.count {
		g, v := &w.segment[k], &s.stretches[k]
		v.config = k
		for i := range k {
			if w.segment[i].legs == g.legs {
				v.config = s.stretches[i].config
				break
			}
		}
		if v.config == k {
			j.Assemble(&v.system, &g.legs, Linear)
		}
		if g.time > 0 {
			if !v.exact.Exp(&s.stretches[v.config].system, g.time, &s.scratch) {
				return false
			}
			s.scratch.Compose(&v.exact, &s.whole)
			copyMap(&s.whole, &s.scratch)
			at += g.time
		}
		row := s.whole.F[g.phase*width : (g.phase+1)*width]
		switch g.ends {
		case decides:
			s.note(g.phase, at)
		case comesToRest:
			copy(s.rests[g.phase].current[:width], row)
			clear(row)
		}
	}
	return true
}

// note keeps what a comparator sees as it decides.
func (s *Sampled) note(phase int, at float64) {
	j := &s.joint
	width := j.N + Inputs
	d := &s.decisions[s.count]
	s.count++
	d.phase, d.at = phase, at
	d.since = s.onTime(phase) - s.plant.Modulator.Delay
	d.current, d.control = statespace.Functional{}, statespace.Functional{}
	copy(d.current[:width], s.whole.F[phase*width:(phase+1)*width])
	for i := range j.N {
		if c := s.control[i]; c != 0 {
			for k, a := range s.whole.F[i*width : (i+1)*width] {
				d.control[k] += float64(c * a)
			}
		}
	}
	for k := j.N; k < width; k++ {
		d.control[k] += s.control[k]
	}
}

// onTime returns how long the high side of a phase conducts [s].
func (s *Sampled) onTime(phase int) float64 {
	if s.plant.Circuit.Legs != nil {
		return s.instants.on[phase]
	}
	return s.plant.Duty * s.plant.Circuit.Period
}

// copyMap copies the used part of a map.
func copyMap(dst, src *statespace.Map) {
	dst.N, dst.M, dst.Time, dst.Rate = src.N, src.M, src.Time, src.Rate
	used := src.N * (src.N + src.M)
	copy(dst.F[:used], src.F[:used])
}

// settle solves for the periodic state and the reference voltage that belongs to
// it: the window must close, and its first comparator must decide where it does.
// Taking the reference as unknown keeps the equations regular for an ideal
// integrator. The integral of the output is no part of them.
func (s *Sampled) settle() bool {
	j := &s.joint
	n := j.Integral
	rotate(s.whole.F[:], j.N+Inputs, s.window.places)
	var b statespace.Point
	s.equations(&b)
	if !s.matrix.Solve(&b) {
		return false
	}
	u := &s.start
	*u = statespace.Point{}
	u[j.N+InputLoad], u[j.N+InputVoltage], u[j.N+InputOne] = j.Circuit.Current, j.Circuit.Vin, 1
	copy(u[:n], b[:n])
	u[j.N+InputReference] = b[n]
	if s.plant.Compensator.Present {
		s.Error = b[n]/s.plant.Feedback.Reference - 1
	}
	return true
}

// equations fills the matrix and the right side of the periodic state and its
// reference.
func (s *Sampled) equations(b *statespace.Point) {
	j, m := &s.joint, &s.matrix
	n, width := j.Integral, j.N+Inputs
	load, voltage := j.Circuit.Current, j.Circuit.Vin
	inputs := func(row []float64) float64 {
		return float64(row[j.N+InputLoad]*load) + float64(row[j.N+InputVoltage]*voltage) + row[j.N+InputOne]
	}
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
		m.Set(i, n, -row[j.N+InputReference])
		b[i] = inputs(row)
	}
	d := &s.decisions[0]
	for k := range n {
		m.Set(n, k, d.control[k]-float64(s.plant.sense()*d.current[k]))
	}
	m.Set(n, n, d.control[j.N+InputReference])
	b[n] = s.plant.RampSlope()*d.since - inputs(d.control[:])
}

// trace follows the periodic solution through the window and fills what the
// comparators and the turn-offs do to a deviation on the way.
func (s *Sampled) trace() {
	j, w := &s.joint, &s.window
	n := j.N
	z := s.start
	s.Slope, s.Peak = math.Inf(1), math.Inf(-1)
	for k := range s.count {
		d := &s.decisions[k]
		d.enter, d.jump = statespace.Point{}, statespace.Point{}
	}
	decided := 0
	for k := range w.count {
		g, v := &w.segment[k], &s.stretches[k]
		system := &s.stretches[v.config].system
		if g.time > 0 {
			var next statespace.Point
			v.exact.Apply(&next, &z)
			z = next
			for i := range decided {
				s.carry(&v.exact, &s.decisions[i].enter)
			}
		}
		var rate statespace.Point
		if g.ends != windowEnds && g.ends != turnsOn {
			system.Derivative(&rate, &z)
		}
		r := &s.rests[g.phase]
		switch g.ends {
		case decides:
			d := &s.decisions[decided]
			d.slope = s.plant.RampSlope() + s.plant.sense()*rate[g.phase] - s.control.Slope(system, &rate)
			s.Slope, s.Peak = min(s.Slope, d.slope), max(s.Peak, z[g.phase])
			for i := range decided {
				earlier := &s.decisions[i].enter
				d.voltage[i], d.amperes[i] = s.control.At(earlier, n), earlier[g.phase]
			}
			decided++
		case turnsOff:
			d := s.decisionOf(g.phase)
			r.off = z[g.phase]
			var after statespace.Point
			s.stretches[s.stretches[k+1].config].system.Derivative(&after, &z)
			for i := range n {
				d.jump[i] = rate[i] - after[i]
			}
			d.enter = d.jump
		case turnsOn:
			r.valley = z[g.phase]
		case comesToRest:
			r.left, r.fall = z[g.phase], -rate[g.phase]
			z[g.phase], r.delayed = 0, [switched.MaxPhases]float64{}
			for i := range decided {
				enter := &s.decisions[i].enter
				r.delayed[i], enter[g.phase] = enter[g.phase], 0
			}
		}
	}
	for k := range s.count {
		rotate(s.decisions[k].enter[:], 1, w.places)
	}
}

// decisionOf returns the decision of a phase.
func (s *Sampled) decisionOf(phase int) *decision {
	k := 0
	for s.decisions[k].phase != phase {
		k++
	}
	return &s.decisions[k]
}

// assemble fills the matrices of the open, the inner and the closed loop.
func (s *Sampled) assemble() {
	j := &s.joint
	n, width := j.N, j.N+Inputs
	s.open.N = n
	for i := range n {
		copy(s.open.A[i*n:i*n+n], s.whole.F[i*width:i*width+n])
	}
	if !s.plant.Compensator.Present {
		s.control = statespace.Functional{}
		for k := range s.count {
			s.decisions[k].control = statespace.Functional{}
			s.decisions[k].voltage = [switched.MaxPhases]float64{}
		}
	}
	var delays [switched.MaxPhases]statespace.Functional
	s.delays(&delays, 0)
	s.close(&s.inner, &delays)
	s.delays(&delays, 1)
	s.close(&s.closed, &delays)
	if s.count > 1 {
		s.lift.set(s, &delays)
		return
	}
	var column, row statespace.Point
	d := &s.decisions[0]
	for i := range n {
		column[i], row[i] = d.enter[i]/d.slope, -d.control[i]
	}
	s.transfer.Reduce(&s.inner, &column, &row)
}

// delays fills how far each decision is delayed by the state at the window's start,
// with the given share of the control voltage's deviation fed back.
func (s *Sampled) delays(dst *[switched.MaxPhases]statespace.Functional, fed float64) {
	n, sense := s.joint.N, s.plant.sense()
	for k := range s.count {
		d, row := &s.decisions[k], &dst[k]
		for i := range n {
			row[i] = float64(fed*d.control[i]) - float64(sense*d.current[i])
		}
		for e := range k {
			by := float64(fed*d.voltage[e]) - float64(sense*d.amperes[e])
			for i := range n {
				row[i] += float64(by * dst[e][i])
			}
		}
		for i := range n {
			row[i] /= d.slope
		}
	}
}

// close sets m to the map over the window with the decisions delayed as told.
func (s *Sampled) close(m *statespace.Real, delays *[switched.MaxPhases]statespace.Functional) {
	n := s.joint.N
	m.N = n
	copy(m.A[:n*n], s.open.A[:n*n])
	for k := range s.count {
		enter, row := &s.decisions[k].enter, &delays[k]
		for i := range n {
			for c := range n {
				m.A[i*n+c] += float64(enter[i] * row[c])
			}
		}
	}
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
