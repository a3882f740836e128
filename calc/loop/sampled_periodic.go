package loop

import (
	"math"

	"railproof/calc/statespace"
	"railproof/calc/switched"
)

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
