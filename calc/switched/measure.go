package switched

import "math"

// tally gathers a current over the period.
type tally struct{ charge, square float64 }

func (t *tally) branch(period float64) Branch {
	return Branch{Mean: t.charge / period, RMS: math.Sqrt(max(0, t.square) / period)}
}

type legTally struct {
	high, rect  tally
	conduct     float64
	span        extent
	turnOn, cut float64
}

// measure writes the figures of the periodic state found, but for the range of
// the output, which it leaves in out if given.
func (s *Solver) measure(c *Circuit, sol *Solution, out *extent) {
	nw, n := &s.nw, s.nw.n
	var legs [MaxPhases]legTally
	for p := range legs {
		legs[p].span = extent{math.Inf(1), math.Inf(-1)}
	}
	var input tally
	var nodeArea, nodeSquare float64
	var bankSquare [MaxBanks]float64
	m := &s.moments
	for k := range s.count {
		v := &s.iv[k]
		single := nw.phases == 1 && v.top.pos[0] != resting
		if single {
			m.rates(s, k)
		} else {
			m.set(s, k)
		}
		var lit tally
		var current, node linear
		if single {
			current = s.kirchhoff(k)
			m.q[0] = current.mean(v, n)
			m.x[0] = current.square(v, &m.y, n)
		}
		for j := range nw.phases {
			lt := &legs[s.legOf(j)]
			if v.top.pos[j] == resting {
				lt.span.add(0)
				continue
			}
			i := s.ref.i[j]
			q := m.q[j]
			part := tally{i*v.t + q, i*i*v.t + 2*i*q + m.x[j*n+j]}
			if v.top.pos[j] == high {
				lt.high.charge += part.charge
				lt.high.square += part.square
				lit.charge += part.charge
				for l := range nw.phases {
					if v.top.pos[l] == high {
						lit.square += i*s.ref.i[l]*v.t + s.ref.i[l]*q + i*m.q[l] + m.x[j*n+l]
					}
				}
				if s.next(k, j) != high {
					lt.cut = i + v.stop[j]
				}
			} else {
				lt.rect.charge += part.charge
				lt.rect.square += part.square
				lt.conduct += v.t
			}
			if s.next(k, j) == high && (v.top.pos[j] != high || s.cyclic && j == nw.phases-1) {
				lt.turnOn = i + v.stop[j]
			}
		}
		s.feed[k] = s.drawn(k, lit.charge)
		input.charge += lit.charge
		input.square += lit.square
		if single {
			node = s.nodeOf(k, &current)
			nodeArea += node.mean(v, n)
			if c.Conductance != 0 {
				nodeSquare += node.square(v, &m.y, n)
			}
		} else {
			nodeArea += nw.node(&m.q)
			var cx vec
			for i := range n {
				for j := range n {
					cx[i] += m.x[i*n+j] * s.weight(j)
				}
			}
			nodeSquare += nw.node(&cx)
		}
		for b := range nw.banks {
			at := nw.phases + b
			bankSquare[b] += nw.capacitance[b] * nw.capacitance[b] * m.y[at*n+at]
		}
		s.extremes(k, &m.y0, &legs, out)
	}
	s.feeds = s.count
	solved := s.horizon * c.Period
	s.report(c, sol, &legs, &input)
	mean := nodeArea / solved
	vo := s.ref.node + mean
	sol.OutputMean = vo
	load := c.load(vo)
	variance := max(0, nodeSquare/solved-mean*mean)
	sol.OutputPower = vo*load + c.Conductance*variance
	for b := range nw.banks {
		sol.BankMean[b] = vo // no direct current flows in a bank
		sol.BankRMS[b] = math.Sqrt(max(0, bankSquare[b]) / solved)
	}
	sol.balance(c)
}

// drawn returns what interval k draws from the input, given the charge.
func (s *Solver) drawn(k int, charge float64) feed {
	v := &s.iv[k]
	var rate vec
	v.top.slope(&s.nw, &v.stop, &rate)
	f := feed{t: v.t, charge: charge}
	for j := range s.nw.phases {
		if v.top.pos[j] == high {
			f.i0 += s.ref.i[j] + v.start[j]
			f.i1 += s.ref.i[j] + v.stop[j]
			f.d0 += s.moments.y0[j]
			f.d1 += rate[j]
		}
	}
	return f
}

// weight returns the weight of state j in the node voltage.
func (s *Solver) weight(j int) float64 {
	if j < s.nw.phases {
		return s.nw.rho
	}
	return s.nw.couple[j-s.nw.phases]
}

// legOf returns the leg that slot j stands for in the answer.
func (s *Solver) legOf(j int) int {
	if s.cyclic {
		return 0
	}
	return j
}

// report fills the legs and the input.
func (s *Solver) report(c *Circuit, sol *Solution, legs *[MaxPhases]legTally, input *tally) {
	sol.Duty = s.duty
	sol.Residual = s.closure
	sol.Iterations = s.rounds
	count := 1
	if c.Legs != nil {
		count = c.Phases
	}
	for p := range count {
		lt := &legs[p]
		ls := &sol.Legs[p]
		if p == 0 {
			ls = &sol.Leg
		}
		ls.Mode = Continuous
		if s.conduct[p] < 1 {
			ls.Mode = Discontinuous
		}
		ls.Conduct = lt.conduct / c.Period
		ls.HighSide = lt.high.branch(c.Period)
		ls.Rectifier = lt.rect.branch(c.Period)
		both := tally{lt.high.charge + lt.rect.charge, lt.high.square + lt.rect.square}
		ls.Inductor = both.branch(c.Period)
		ls.Peak, ls.Valley = lt.span.most, lt.span.least
		ls.TurnOn, ls.TurnOff = lt.turnOn, lt.cut
	}
	if c.Legs != nil {
		sol.Legs[0] = sol.Leg
	}
	sum := input.branch(s.horizon * c.Period)
	sol.InputMean, sol.InputRMS = sum.Mean, sum.RMS
	sol.InputPower = c.Vin * sum.Mean
}

// balance computes how far the powers, each from its own integral, are from
// adding up.
func (sol *Solution) balance(c *Circuit) {
	loss, high := 0.0, 0.0
	for p := range c.Phases {
		leg, ls := c.leg(p), &sol.Leg
		if c.Legs != nil {
			ls = &sol.Legs[p]
		}
		loss += leg.Winding*ls.Inductor.RMS*ls.Inductor.RMS +
			leg.HighSide*ls.HighSide.RMS*ls.HighSide.RMS +
			leg.Rectifier.Slope*ls.Rectifier.RMS*ls.Rectifier.RMS +
			leg.Rectifier.Threshold*ls.Rectifier.Mean
		high += ls.HighSide.RMS
	}
	for k := range c.Banks {
		loss += c.Bank[k].ESR * sol.BankRMS[k] * sol.BankRMS[k]
	}
	scale := max(max(math.Abs(sol.InputPower), math.Abs(sol.OutputPower)), c.Vin*high)
	sol.EnergyBalance = 0
	if residual := sol.InputPower - sol.OutputPower - loss; residual != 0 {
		sol.EnergyBalance = math.Abs(residual) / scale
	}
}
