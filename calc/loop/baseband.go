package loop

import (
	"math"
	"math/cmplx"

	"railproof/calc/parts"
	"railproof/calc/statespace"
)

// workspace holds what the transfer functions of one frequency need.
type workspace struct {
	resolvent [maxSegments]statespace.Complex      // (jw I - A) of each switch state, stage only, factored
	observe   [maxSegments]statespace.ComplexPoint // output row times its inverse
	forced    [maxSegments]statespace.ComplexPoint // periodic response to the excitation
	turn      [maxSegments]complex128              // e^{jwt} as each segment ends
	network   statespace.Complex                   // (jw I - A) of the compensator, factored
	inner     statespace.Complex
	closed    statespace.Complex
}

// excitation is what moves the stage at the frequency in question.
type excitation struct {
	input  int        // index of the input that moves by 1, or noInput
	drive  complex128 // [V] added to the control voltage
	closed bool       // the voltage loop is closed
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
	t := Transfers{Loop: s.transfer.At(z)}
	t.Control = s.respond(w, excitation{input: noInput, drive: 1})
	t.Duty = complex(math.NaN(), math.NaN())
	if s.plant.Modulator.Mode == parts.VoltageMode {
		t.Duty = t.Control * complex(s.Slope*s.plant.Circuit.Period, 0)
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
		at += s.window.segment[k].time
		sin, cos := math.Sincos(w * at)
		ws.turn[k] = complex(cos, sin)
		if s.config[k] != k {
			continue
		}
		resolvent(&ws.resolvent[k], &s.systems[k], 0, m, jw)
		for i := range m {
			ws.observe[k][i] = complex(j.Output[i], 0)
		}
		ws.resolvent[k].SolveTransposed(&ws.observe[k])
	}
	resolvent(&ws.network, &s.systems[0], m, j.N-m, jw)
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
	late := e.drive
	if e.closed {
		n, solver = j.N, &ws.closed
		late += complex(s.control[j.N+e.input], 0)
	}
	if e.input == InputVoltage {
		late -= s.rampResponse(w)
	}
	s.force(n, e.input)

	// The window's answer to a zero deviation is the right side of z x = M x + h.
	var x statespace.ComplexPoint
	s.travel(n, &x, late, e.input != noInput, nil)
	rotateComplex(&x, j.Circuit.Phases)
	solver.Solve(&x)
	late -= complex(s.plant.sense(), 0) * x[0]
	if e.closed {
		for i := range n {
			late += complex(s.control[i], 0) * x[i]
		}
	}
	var component complex128
	s.travel(n, &x, late, e.input != noInput, &component)
	component /= complex(s.window.length, 0)
	if e.input != noInput {
		component += complex(j.Output[j.N+e.input], 0)
	}
	return component
}

// rampResponse returns how far a feed-forward ramp, the integral of the source
// voltage since the clock, has moved at the comparator's decision per volt.
func (s *Sampled) rampResponse(w float64) complex128 {
	rate := s.plant.feedForwardRate()
	if rate == 0 {
		return 0
	}
	since := s.plant.Duty*s.plant.Circuit.Period - s.plant.Modulator.Delay
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
		if s.config[k] != k {
			continue
		}
		x := &ws.forced[k]
		for i := range m {
			x[i] = complex(s.systems[k].Row(i)[j.N+input], 0)
		}
		ws.resolvent[k].Solve(x)
		if n == m {
			continue
		}
		var c statespace.ComplexPoint
		for i := m; i < n; i++ {
			row := s.systems[k].Row(i)
			c[i-m] = complex(row[j.N+input], 0)
			for l := range m {
				c[i-m] += complex(row[l], 0) * x[l]
			}
		}
		ws.network.Solve(&c)
		copy(x[m:n], c[:n-m])
	}
}

// travel carries the deviation x of the first n states through the window, with
// the turn-off late by late/Slope, and adds to component the integral of
// e^{-jwt} times the output, the excitation's direct share left out.
func (s *Sampled) travel(n int, x *statespace.ComplexPoint, late complex128, excited bool, component *complex128) {
	j, ws := &s.joint, &s.response
	width := j.N + Inputs
	turn := complex128(1) // e^{jwt}
	for k := range s.window.count {
		g := &s.window.segment[k]
		if g.time > 0 {
			config := s.config[k]
			observe, forced := &ws.observe[config], &ws.forced[config]
			if excited {
				for i := range n {
					x[i] -= forced[i] * turn
				}
			}
			if component != nil {
				*component += observed(observe, x, j.Network) * conjugate(turn)
			}
			f := s.maps[k].F[:]
			var next statespace.ComplexPoint
			for i := range n {
				next[i] = dotComplex(f[i*width:i*width+n], x)
			}
			turn = ws.turn[k]
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
		case turnsOff:
			late /= complex(s.Slope, 0)
			for i := range n {
				x[i] += scale(late, s.jump[i])
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
		x[i] = s.enter[i] * p.Circuit.Period
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
		var system statespace.System
		j.Assemble(&system, &g.legs, Linear)
		if !s.whole.Exp(&system, g.time, &s.scratch) {
			return math.NaN(), false
		}
		s.carry(&s.whole, &x)
		switch g.ends {
		case turnsOff:
			for i := range n {
				x[i] += s.jump[i] * p.Circuit.Period
			}
		case comesToRest:
			x[g.phase] = 0
		}
	}
	return x[j.Integral] / s.window.length, true
}
