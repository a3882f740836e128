package switched

import "math"

const (
	maxIntervals = 3*MaxPhases + 1
	ladderCount  = 3     // as many intervals as equal phases have
	sameInstant  = 1e-14 // [1] of a period; edges closer than this are one
)

// interval is a stretch of time in which no switch moves.
type interval struct {
	top   topology
	t     float64 // [s]
	f     square  // over the whole interval
	d     vec
	start vec // deviation from the reference as it begins
	stop  vec // as it ends
}

// Solver holds the workspace of one goroutine. The zero value is ready. It
// allocates once, when it first meets a circuit that is not a single phase with
// a single bank.
type Solver struct {
	fast   oneBank
	closed bool // the solution is the closed form's
	feed   [maxIntervals]feed
	feeds  int // how many of feed are filled
	*workspace
}

// workspace is what the solution over intervals needs.
type workspace struct {
	nw      network
	ref     reference
	iv      [maxIntervals]interval
	count   int
	cyclic  bool               // one N-th of the period is solved, currents change places after it
	lead    [MaxPhases]float64 // [1] how far into its own cycle each slot is at the start
	horizon float64            // [1] solved part of the period
	duty    float64
	conduct [MaxPhases]float64 // [1] end of conduction in each leg's own cycle, 1 in continuous conduction
	ladders [ladderCount]ladder
	total   square
	whole   square
	product square
	scratch scratch
	pivot   [maxStates]int
	closure float64 // [1] relative closure of one more period
	rounds  int
	work    cell
	moments moments
	watches [MaxPhases + 1]watch
}

// prepare sets what depends on the circuit alone.
//
// Equal phases are solved over one N-th of the period. Slot j is the phase that
// turned on j N-ths ago; after an N-th the current of slot j has moved to slot
// j + 1, that of the last to slot 0. Unequal phases are solved over the whole
// period with slot p being phase p.
func (s *Solver) prepare(c *Circuit) {
	if s.workspace == nil {
		s.workspace = new(workspace)
	}
	s.closed, s.rounds = false, 0
	s.nw.set(c)
	n := float64(c.Phases)
	s.cyclic = c.Legs == nil && c.Phases > 1
	s.horizon = 1
	if s.cyclic {
		s.horizon = 1 / n
	}
	for j := range c.Phases {
		switch {
		case s.cyclic:
			s.lead[j] = float64(j) / n
		case j == 0:
			s.lead[j] = 0
		default:
			s.lead[j] = 1 - float64(j)/n
		}
	}
	s.forget()
	for i := range s.ladders {
		s.ladders[i].owner = -1
	}
}

// conduction returns when slot j stops to conduct in its own cycle.
func (s *Solver) conduction(j int) float64 {
	if s.cyclic {
		return s.conduct[0]
	}
	return s.conduct[j]
}

// schedule lays out the intervals for the duty ratio and the ends of conduction.
func (s *Solver) schedule(c *Circuit, duty float64) {
	s.duty = duty
	var edges [maxIntervals + 1]float64
	m := 1 // edges[0] = 0
	add := func(at float64) {
		at -= math.Floor(at)
		if !(at > sameInstant && at < s.horizon-sameInstant) {
			return
		}
		i := m
		for ; i > 1 && edges[i-1] > at; i-- {
			edges[i] = edges[i-1]
		}
		edges[i] = at
		if math.Abs(at-edges[i-1]) <= sameInstant || (i < m && math.Abs(edges[i+1]-at) <= sameInstant) {
			copy(edges[i:m], edges[i+1:m+1])
			return
		}
		m++
	}
	for j := range c.Phases {
		add(duty - s.lead[j])
		if z := s.conduction(j); z < 1 {
			add(z - s.lead[j])
		}
		if !s.cyclic {
			add(1 - s.lead[j])
		}
	}
	s.count = m
	for k := range m {
		begin, end := edges[k], s.horizon
		if k+1 < m {
			end = edges[k+1]
		}
		v := &s.iv[k]
		v.t = (end - begin) * c.Period
		middle := begin + 0.5*(end-begin)
		for j := range c.Phases {
			angle := s.lead[j] + middle
			angle -= math.Floor(angle)
			switch {
			case angle < duty:
				v.top.pos[j] = high
			case angle < s.conduction(j):
				v.top.pos[j] = rectifying
			default:
				v.top.pos[j] = resting
			}
		}
	}
}

// periodic finds the periodic state for the intervals laid out, counted from the
// reference. It reports false if there is none.
//
// Composing the interval maps gives ξ(end) = ξ + F ξ + d; the periodic state
// solves (Π − I + Π F) ξ = −Π d with the change of places Π. The residual of the
// displacements themselves then refines it once.
func (s *Solver) periodic(c *Circuit) bool {
	nw, n := &s.nw, s.nw.n
	f, g := &s.whole, &s.product
	for i := range n * n {
		f[i] = 0
	}
	var d, e vec
	for k := range s.count {
		v := &s.iv[k]
		v.top.set(nw, &s.ref, c)
		ld := &s.ladders[k%ladderCount]
		ld.owner = -1
		if !ld.build(&s.scratch, nw, &v.top, v.t) {
			return false
		}
		ld.owner = k
		copy(v.f[:n*n], ld.f[ld.levels][:n*n])
		v.d = ld.d[ld.levels]
		for p := range nw.phases {
			if v.top.pos[p] == resting {
				for j := range n {
					f[p*n+j] = 0
				}
				f[p*n+p] = -1
				d[p] = -s.ref.i[p]
			}
		}
		multiply(g, &v.f, f, n)
		apply(&v.f, &d, &e, n)
		for i := range n * n {
			f[i] += v.f[i] + g[i]
		}
		for i := range n {
			d[i] += v.d[i] + e[i]
		}
	}
	for i := range n {
		to := s.after(i)
		for j := range n {
			s.total[to*n+j] = f[i*n+j]
		}
		e[to] = -d[i]
		if to != i {
			s.total[to*n+i] += 1
			s.total[to*n+to] -= 1
		}
	}
	if nw.input.banks > 0 {
		nw.input.pin(nw, &s.total, &e)
	}
	if !solve(&s.total, &s.pivot, &e, n) {
		return false
	}
	x := e
	r := s.traverse(&x)
	for i := range n {
		r[i] = -r[i]
	}
	if nw.input.banks > 0 {
		r[n-1] = 0 // the place of the equation that pin took
	}
	substitute(&s.total, &s.pivot, &r, n)
	for i := range n {
		x[i] += r[i]
	}
	r = s.traverse(&x)
	s.closure = 0
	current, voltage := 0.0, math.Abs(s.ref.v)
	for p := range nw.phases {
		current = max(current, math.Abs(s.ref.i[p]+x[p]))
		for k := range s.count {
			current = max(current, math.Abs(s.ref.i[p]+s.iv[k].stop[p]))
		}
	}
	for i := range n {
		scale := current
		if i >= nw.phases {
			scale = voltage
		}
		if scale > 0 {
			s.closure = max(s.closure, math.Abs(r[i])/scale)
		}
	}
	return s.closure < 1e-9 // false for NaN as well
}

// after returns where the state in place i is after the solved part.
func (s *Solver) after(i int) int {
	if !s.cyclic || i >= s.nw.phases {
		return i
	}
	return (i + 1) % s.nw.phases
}

// traverse sets out from x, fills the start and stop of every interval and
// returns by how much the state has changed at the end, change of places included.
func (s *Solver) traverse(x *vec) vec {
	n := s.nw.n
	var sum, y vec
	at := *x
	for k := range s.count {
		v := &s.iv[k]
		for p := range s.nw.phases {
			if v.top.pos[p] == resting {
				sum[p] -= s.ref.i[p] + at[p]
				at[p] = -s.ref.i[p]
			}
		}
		v.start = at
		apply(&v.f, &at, &y, n)
		for i := range n {
			y[i] += v.d[i]
			sum[i] += y[i]
			at[i] += y[i]
		}
		v.stop = at
	}
	if !s.cyclic {
		return sum
	}
	var r vec
	for i := range n {
		to := s.after(i)
		r[to] += x[i] - x[to] + sum[i]
	}
	return r
}

// next returns the position that slot j takes after interval k.
func (s *Solver) next(k, j int) position {
	if k+1 < s.count {
		return s.iv[k+1].top.pos[j]
	}
	return s.iv[0].top.pos[s.after(j)]
}

// rungs returns the ladder of interval k, built anew if it was given away.
func (s *Solver) rungs(k int) *ladder {
	ld := &s.ladders[k%ladderCount]
	if ld.owner != k {
		ld.build(&s.scratch, &s.nw, &s.iv[k].top, s.iv[k].t)
		ld.owner = k
	}
	return ld
}
