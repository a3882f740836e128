package loop

import (
	"math"
	"math/cmplx"

	"railproof/calc/parts"
	"railproof/calc/statespace"
	"railproof/calc/switched"
)

// workspace holds what the transfer functions of one frequency need.
type workspace struct {
	network statespace.Complex // (jw I - A) of the compensator, factored
	inner   statespace.Complex
	closed  statespace.Complex
}

// excitation is what moves the stage at the frequency in question.
type excitation struct {
	input  int     // index of the input that moves by 1, or noInput
	drive  float64 // [V] added to the control voltage
	delay  float64 // [s] added to the delay of each decision
	closed bool    // the voltage loop is closed
}

const noInput = -1

// At returns the exact transfer functions at a frequency [Hz] above zero: the
// component of the output voltage at the frequency of the excitation, the rest of
// its spectrum left out, as a network analyser reads it. The loop gain is that of
// Loop.
//
// Between two edges the response to an excitation e^{jwt} is Xp e^{jwt} plus a
// free part that the interval's map carries, with Xp = (jw - A)^-1 B; the
// component of the free part is -c (jw - A)^-1 [e^{-jwt} x] over the interval.
func (s *Sampled) At(frequency float64) Transfers {
	w := 2 * math.Pi * frequency
	sin, cos := math.Sincos(w * s.window.length)
	z := complex(cos, sin)
	s.prepare(w, z)
	var t Transfers
	t.Loop = s.Loop(frequency)
	t.Control = s.respond(w, excitation{input: noInput, drive: 1})
	switch {
	case s.plant.Modulator.Mode != parts.VoltageMode:
		t.Duty = complex(math.NaN(), math.NaN())
	case s.count == 1:
		t.Duty = t.Control * complex(s.Slope*s.plant.Circuit.Period, 0)
	default:
		t.Duty = s.respond(w, excitation{input: noInput, delay: s.plant.Circuit.Period})
	}
	t.Line = s.respond(w, excitation{input: InputVoltage})
	t.Impedance = -s.respond(w, excitation{input: InputLoad})
	if !s.plant.Compensator.Present {
		return t
	}
	t.ClosedLine = s.respond(w, excitation{input: InputVoltage, closed: true})
	t.ClosedImpedance = -s.respond(w, excitation{input: InputLoad, closed: true})
	return t
}

// prepare factors the matrices of one frequency. The states before Network move
// independently of the compensator, so their systems are factored by themselves.
func (s *Sampled) prepare(w float64, z complex128) {
	j, ws := &s.joint, &s.response
	m := j.Network
	jw := complex(0, w)
	at := 0.0
	for k := range s.window.count {
		v := &s.stretches[k]
		at += s.window.segment[k].time
		sin, cos := math.Sincos(w * at)
		v.turn = complex(cos, sin)
		if v.config != k {
			continue
		}
		resolvent(&v.resolvent, &v.system, 0, m, jw)
		for i := range m {
			v.observe[i] = complex(j.Output[i], 0)
		}
		v.resolvent.SolveTransposed(&v.observe)
	}
	resolvent(&ws.network, &s.stretches[0].system, m, j.N-m, jw)
	shifted(&ws.inner, &s.inner, m, z)
	shifted(&ws.closed, &s.closed, j.N, z)
}

// resolvent factors jw I - A for n states from the given one.
func resolvent(c *statespace.Complex, s *statespace.System, from, n int, jw complex128) {
	c.N = n
	for i := range n {
		row := s.Row(from + i)
		for k := range n {
			c.A[i*n+k] = complex(-row[from+k], 0)
		}
		c.A[i*n+i] += jw
	}
	c.Factor()
}

// shifted factors z I - M for the leading n states.
func shifted(c *statespace.Complex, m *statespace.Real, n int, z complex128) {
	c.N = n
	for i := range n {
		for k := range n {
			c.A[i*n+k] = complex(-m.At(i, k), 0)
		}
		c.A[i*n+i] += z
	}
	c.Factor()
}

// respond returns the component of the output at the excitation's frequency.
func (s *Sampled) respond(w float64, e excitation) complex128 {
	j, ws := &s.joint, &s.response
	n, solver := j.Network, &ws.inner
	if e.closed {
		n, solver = j.N, &ws.closed
	}
	s.force(n, e.input)

	// The window's answer to a zero deviation is the right side of z x = M x + h.
	var x statespace.ComplexPoint
	s.travel(w, n, &x, &e, nil)
	rotateComplex(&x, s.window.places)
	solver.Solve(&x)
	var component complex128
	s.travel(w, n, &x, &e, &component)
	component /= complex(s.window.length, 0)
	if e.input != noInput {
		component += complex(j.Output[j.N+e.input], 0)
	}
	return component
}

// delay returns how far a decision is delayed by the excitation and by the deviation
// x of the first n states, both as it is made [s].
func (s *Sampled) delay(w float64, n int, d *decision, x *statespace.ComplexPoint, e *excitation, turn complex128) complex128 {
	late := complex(e.drive, 0)
	if e.closed {
		late += complex(s.control[s.joint.N+e.input], 0)
	}
	if e.input == InputVoltage {
		late -= s.rampResponse(w, d.since)
	}
	late *= turn
	late -= complex(s.plant.sense(), 0) * x[d.phase]
	if e.closed {
		for i := range n {
			late += complex(s.control[i], 0) * x[i]
		}
	}
	return late/complex(d.slope, 0) + complex(e.delay, 0)*turn
}

// rampResponse returns how far a feed-forward ramp, the integral of the source
// voltage since the clock, has moved at the comparator's decision per volt.
func (s *Sampled) rampResponse(w, since float64) complex128 {
	rate := s.plant.feedForwardRate()
	if rate == 0 {
		return 0
	}
	jw := complex(0, w)
	return complex(rate, 0) * (1 - cmplx.Exp(-jw*complex(since, 0))) / jw
}

// force sets the forced response of the first n states in every switch state.
func (s *Sampled) force(n, input int) {
	if input == noInput {
		return
	}
	j, ws := &s.joint, &s.response
	m := j.Network
	for k := range s.window.count {
		v := &s.stretches[k]
		if v.config != k {
			continue
		}
		x := &v.forced
		for i := range m {
			x[i] = complex(v.system.Row(i)[j.N+input], 0)
		}
		v.resolvent.Solve(x)
		if n == m {
			continue
		}
		var c statespace.ComplexPoint
		for i := m; i < n; i++ {
			row := v.system.Row(i)
			c[i-m] = complex(row[j.N+input], 0)
			for l := range m {
				c[i-m] += complex(row[l], 0) * x[l]
			}
		}
		ws.network.Solve(&c)
		copy(x[m:n], c[:n-m])
	}
}

// travel carries the deviation x of the first n states through the window, decisions
// delayed by it and by the excitation, and adds to component the integral of e^{-jwt}
// times the output, the excitation's direct share left out.
func (s *Sampled) travel(w float64, n int, x *statespace.ComplexPoint, e *excitation, component *complex128) {
	j := &s.joint
	width := j.N + Inputs
	excited := e.input != noInput
	turn := complex128(1) // e^{jwt}
	var late [switched.MaxPhases]complex128
	decided := 0
	for k := range s.window.count {
		g, v := &s.window.segment[k], &s.stretches[k]
		if g.time > 0 {
			observe, forced := &s.stretches[v.config].observe, &s.stretches[v.config].forced
			if excited {
				for i := range n {
					x[i] -= forced[i] * turn
				}
			}
			if component != nil {
				*component += observed(observe, x, j.Network) * conjugate(turn)
			}
			f := v.exact.F[:]
			var next statespace.ComplexPoint
			for i := range n {
				next[i] = dotComplex(f[i*width:i*width+n], x)
			}
			turn = v.turn
			if component != nil {
				*component -= observed(observe, &next, j.Network) * conjugate(turn)
			}
			copy(x[:n], next[:n])
			if excited {
				for i := range n {
					x[i] += forced[i] * turn
				}
				if component != nil {
					for i := range j.Network {
						*component += scale(forced[i], j.Output[i]*g.time)
					}
				}
			}
		}
		switch g.ends {
		case decides:
			late[g.phase] = s.delay(w, n, &s.decisions[decided], x, e, turn)
			decided++
		case turnsOff:
			jump := &s.decisionOf(g.phase).jump
			for i := range n {
				x[i] += scale(late[g.phase], jump[i])
			}
		case comesToRest:
			x[g.phase] = 0
		}
	}
}

func observed(row, x *statespace.ComplexPoint, n int) complex128 {
	sum := complex128(0)
	for i := range n {
		sum += row[i] * x[i]
	}
	return sum
}

func dotComplex(row []float64, x *statespace.ComplexPoint) complex128 {
	var re, im float64
	for i, a := range row {
		re += float64(a * real(x[i]))
		im += float64(a * imag(x[i]))
	}
	return complex(re, im)
}

func scale(x complex128, a float64) complex128 { return complex(real(x)*a, imag(x)*a) }

func conjugate(x complex128) complex128 { return complex(real(x), -imag(x)) }

func rotateComplex(x *statespace.ComplexPoint, phases int) {
	if phases < 2 {
		return
	}
	first := x[0]
	copy(x[:phases-1], x[1:phases])
	x[phases-1] = first
}

// DutyGain returns the derivative of the mean output voltage by the duty ratio
// [V], with the switches on a fixed schedule: exact, from the map over a window
// with the integral of the output as one state more.
func (s *Sampled) DutyGain() (float64, bool) {
	p := s.plant
	p.Compensator.Present = false
	j := Joint{Integrate: true}
	j.Set(&p, Limits{})
	n := j.Network
	var x statespace.Point
	m := &s.matrix
	m.N = n
	for i := range n {
		for k := range s.count {
			x[i] += s.decisions[k].enter[i] * p.Circuit.Period
		}
		for k := range n {
			a := -s.open.At(i, k)
			if i == k {
				a++
			}
			m.Set(i, k, a)
		}
	}
	if !m.Solve(&x) {
		return math.NaN(), false
	}
	x[j.Integral] = 0
	for k := range s.window.count {
		g := &s.window.segment[k]
		if g.time > 0 {
			var system statespace.System
			j.Assemble(&system, &g.legs, Linear)
			if !s.whole.Exp(&system, g.time, &s.scratch) {
				return math.NaN(), false
			}
			s.carry(&s.whole, &x)
		}
		switch g.ends {
		case turnsOff:
			jump := &s.decisionOf(g.phase).jump
			for i := range n {
				x[i] += jump[i] * p.Circuit.Period
			}
		case comesToRest:
			x[g.phase] = 0
		}
	}
	return x[j.Integral] / s.window.length, true
}
