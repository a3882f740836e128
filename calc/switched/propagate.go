package switched

import "math"

// Positions tells where the switches of every phase stand.
type Positions [MaxPhases]Position

// Propagator moves the state of a circuit through time with its switches held in
// place: absolute currents and voltages, exact steps of any length. It serves
// those who watch the circuit cycle by cycle. The zero value is to be Reset.
//
// With the switches held the circuit is dx/dt = A x + b, and
//
//	x(t+h) = x(t) + h φ1(A h) (A x(t) + b),  φ1(z) = (e^z − 1)/z
//
// by the Taylor series of φ1 while |A| h ≤ 1, by doubling the interval map
// beyond.
type Propagator struct {
	nw    network
	ref   reference
	top   topology
	rungs ladder
	work  scratch
	cell  cell
	built float64 // length for which the rungs stand, 0 for none
}

// Reset takes over the circuit; the switches are to be placed again.
func (p *Propagator) Reset(c *Circuit) {
	p.nw.set(c)
	p.ref.set(&p.nw, 0, 0)
	p.built = 0
}

// Place puts the switches of the circuit, the same as given to Reset, into the
// positions. Currents of phases at rest are taken to be zero.
func (p *Propagator) Place(c *Circuit, pos *Positions) {
	p.top.pos = *pos
	p.top.set(&p.nw, &p.ref, c)
	p.built = 0
}

// States returns the number of states: phases and banks.
func (p *Propagator) States() int { return p.nw.n }

// Slope writes dx/dt at x.
func (p *Propagator) Slope(x, dst *State) { p.top.slope(&p.nw, x, dst) }

// Node returns the output node's voltage [V] at x.
func (p *Propagator) Node(x *State) float64 { return p.ref.node + p.nw.node(x) }

// NodeWeights writes the weights of the states in the node's voltage and returns
// the voltage [V] that remains at state zero: v_o = Σ w_i x_i + offset.
func (p *Propagator) NodeWeights(w *State) (offset float64) {
	*w = State{}
	for i := range p.nw.n {
		if i < p.nw.phases {
			w[i] = p.nw.rho
		} else {
			w[i] = p.nw.couple[i-p.nw.phases]
		}
	}
	return p.ref.node
}

// Matrices writes A, row by row, and b of dx/dt = A x + b.
func (p *Propagator) Matrices(a *Matrix, b *State) {
	var unit, column State
	for j := range p.nw.n {
		unit[j] = 1
		if j < p.nw.phases && p.top.pos[j] == Resting {
			column = State{}
		} else {
			p.top.rate(&p.nw, &unit, &column)
		}
		unit[j] = 0
		for i := range p.nw.n {
			a[i][j] = column[i]
		}
	}
	*b = p.top.b
}

// Advance moves x by dt [s]. It reports false when the circuit is too stiff for
// the step (more than 2^40 of its fastest time constants).
func (p *Propagator) Advance(x *State, dt float64) bool {
	if theta := p.top.norm * dt; theta <= 1 {
		var y, moved State
		p.top.slope(&p.nw, x, &y)
		p.top.displace(&p.nw, &y, dt, terms(theta), &moved)
		for i := range p.nw.n {
			x[i] += moved[i]
		}
		return true
	}
	if !p.climb(dt) {
		return false
	}
	p.rungs.step(p.rungs.levels, x, x, p.nw.n)
	return true
}

func (p *Propagator) climb(dt float64) bool {
	if p.built != dt {
		p.built = 0
		if !p.rungs.build(&p.work, &p.nw, &p.top, dt) {
			return false
		}
		p.built = dt
	}
	return true
}

// Crossing finds the first time within dt at which Σ w_i x_i reaches
// level + ramp·t, coming from either side. It moves x there and returns the
// time; otherwise it moves x by dt and reports false. The search looks at eight
// points of every stretch that is short against the circuit's fastest motion and
// at four per doubling of time after the start beyond it, and then solves on the
// exact solution.
func (p *Propagator) Crossing(x, w *State, level, ramp, dt float64) (at float64, found bool) {
	if !p.climb(dt) {
		return 0, false
	}
	n, ld := p.nw.n, &p.rungs
	start := *x
	f := dot(w, x, n) - level
	if t, ok := p.cross(x, w, level, ramp, ld.cell); ok {
		return t, true
	}
	ld.step(ld.cell, &start, x, n)
	at = ld.h[ld.cell]
	for l := ld.cell; l < ld.levels; l++ {
		m := l - 2
		for range 1 << (l - m) {
			var to State
			ld.step(m, x, &to, n)
			if end := at + ld.h[m]; (dot(w, &to, n)-level-ramp*end < 0) != (f < 0) {
				for ; m > ld.cell; m-- {
					var mid State
					ld.step(m-1, x, &mid, n)
					if t := at + ld.h[m-1]; (dot(w, &mid, n)-level-ramp*t < 0) == (f < 0) {
						*x, at = mid, t
					}
				}
				from := *x
				if t, ok := p.cross(x, w, level+ramp*at, ramp, m); ok {
					return at + t, true
				}
				ld.step(m, &from, x, n) // the sign turns within rounding of the end
				return at + ld.h[m], true
			}
			*x = to
			at += ld.h[m]
		}
	}
	return dt, false
}

// cross looks for a crossing in one Taylor cell and moves x there.
func (p *Propagator) cross(x, w *State, level, ramp float64, rung int) (at float64, found bool) {
	n := p.nw.n
	var y State
	p.top.slope(&p.nw, x, &y)
	ce := &p.cell
	ce.set(&p.rungs, &p.top, rung, x, &y, n)
	h := ce.h
	ce.pick(&watch{w: *w, only: -1}, n)
	ce.series[0] -= level + 0.5*ramp*h
	ce.series[1] -= 0.5 * ramp * h
	a, fa := -1.0, dot(w, x, n)-level
	for i := 1; i <= cellParts; i++ {
		b := -1 + 2.0/cellParts*float64(i)
		fb := ce.value(b)
		if (fa < 0) != (fb < 0) {
			z := ce.zero(a, b, fa, fb)
			for j := range n {
				acc := 0.0
				for k := ce.order; k >= 0; k-- {
					acc = acc*z + ce.c[k][j]
				}
				x[j] = acc
			}
			return 0.5 * h * (1 + z), true
		}
		a, fa = b, fb
	}
	return 0, false
}

// zero finds the zero of the series between a and b, where it has opposite
// signs, by regula falsi with halved weights.
func (ce *cell) zero(a, b, fa, fb float64) float64 {
	x := b
	for range 60 {
		if fb == 0 {
			return b
		}
		x = b - fb*(b-a)/(fb-fa)
		if !(math.Min(a, b) <= x && x <= math.Max(a, b)) {
			x = 0.5 * (a + b)
		}
		f := ce.value(x)
		if math.Abs(x-b) <= 4e-16 {
			return x
		}
		if (f < 0) != (fb < 0) {
			a, fa = b, fb
		} else {
			fa *= 0.5
		}
		b, fb = x, f
	}
	return x
}

// Matrix is a square matrix over the states, row first.
type Matrix [MaxStates][MaxStates]float64
