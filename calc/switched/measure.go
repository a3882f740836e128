package switched

import "math"

// moments are the integrals over one interval of the deviation ξ, of its
// products and of the products of its rates y = dξ/dt:
//
//	Q = ∫ξ dτ,  X = ∫ξ ξᵀ dτ,  Y = ∫y yᵀ dτ
//
// Over the first rung h they follow exactly from the Taylor series in Legendre
// form. Each doubling then adds the second half, in which ξ(h+τ) = E ξ(τ) + d:
//
//	Q → Q + E Q + h d
//	X → X + E X Eᵀ + (E Q) dᵀ + d (E Q)ᵀ + h d dᵀ
//	Y → Y + E Y Eᵀ
type moments struct {
	q, y0   vec
	x, y    square
	scratch [2]square
}

func (m *moments) set(s *Solver, k int) {
	nw, n := &s.nw, s.nw.n
	v := &s.iv[k]
	ld := s.rungs(k)
	v.top.slope(nw, &v.start, &m.y0)
	ce := &s.work
	ce.set(nw, &v.top, &v.start, &m.y0, ld.h[ld.cell])
	m.first(ce, n)
	e := &m.scratch[0]
	for l := ld.cell; l < ld.levels; l++ {
		h, d := ld.h[l], &ld.d[l]
		copy(e[:n*n], ld.f[l][:n*n])
		for i := range n {
			e[i*n+i] += 1
		}
		var eq vec
		apply(e, &m.q, &eq, n)
		congruent(e, &m.x, &m.scratch[1], n)
		congruent(e, &m.y, &m.scratch[1], n)
		for i := range n {
			for j := range n {
				m.x[i*n+j] += eq[i]*d[j] + d[i]*eq[j] + h*d[i]*d[j]
			}
		}
		for i := range n {
			m.q[i] += eq[i] + h*d[i]
		}
	}
}

// first fills the moments over the cell.
func (m *moments) first(ce *cell, n int) {
	var a, b vec
	for i := range n * n {
		m.x[i], m.y[i] = 0, 0
	}
	perSecond := 2 / ce.h // x runs from −1 to 1 within h
	for j := 0; j <= ce.order; j++ {
		a, b = vec{}, vec{}
		for k := j; k <= ce.order; k += 2 {
			w := legendre[k][j]
			for i := range n {
				a[i] += w * ce.c[k][i]
			}
			if k < ce.order {
				w *= float64(k+1) * perSecond
				for i := range n {
					b[i] += w * ce.c[k+1][i]
				}
			}
		}
		if j == 0 {
			for i := range n {
				m.q[i] = a[i] * ce.h
			}
		}
		w := ce.h * inverse[2*j+1]
		for i := range n {
			ai, bi := w*a[i], w*b[i]
			for l := range n {
				m.x[i*n+l] += ai * a[l]
				m.y[i*n+l] += bi * b[l]
			}
		}
	}
}

// tally gathers a current over the period.
type tally struct{ charge, square float64 }

func (t *tally) branch(period float64) Branch {
	return Branch{Mean: t.charge / period, RMS: math.Sqrt(math.Max(0, t.square) / period)}
}

type legTally struct {
	high, rect   tally
	conduct      float64
	range_       extent
	turnOn, cut  float64
	discontinous bool
}

// measure writes the figures of the periodic state found.
func (s *Solver) measure(c *Circuit, sol *Solution) {
	nw, n := &s.nw, s.nw.n
	var legs [MaxPhases]legTally
	for p := range legs {
		legs[p].range_ = extent{math.Inf(1), math.Inf(-1)}
	}
	out := extent{math.Inf(1), math.Inf(-1)}
	var input tally
	var nodeArea, nodeSquare float64
	var bankArea, bankSquare [MaxBanks]float64
	m := &s.moments
	for k := range s.count {
		v := &s.iv[k]
		m.set(s, k)
		var lit tally
		for j := range nw.phases {
			lt := &legs[s.legOf(j)]
			if v.top.pos[j] == Resting {
				lt.range_.add(0)
				continue
			}
			i := s.ref.i[j]
			q := m.q[j]
			part := tally{i*v.t + q, i*i*v.t + 2*i*q + m.x[j*n+j]}
			if v.top.pos[j] == High {
				lt.high.charge += part.charge
				lt.high.square += part.square
				lit.charge += part.charge
				for l := range nw.phases {
					if v.top.pos[l] == High {
						lit.square += i*s.ref.i[l]*v.t + s.ref.i[l]*q + i*m.q[l] + m.x[j*n+l]
					}
				}
				if s.next(k, j) != High {
					lt.cut = i + v.stop[j]
				}
			} else {
				lt.rect.charge += part.charge
				lt.rect.square += part.square
				lt.conduct += v.t
			}
			if s.next(k, j) == High && (v.top.pos[j] != High || s.cyclic && j == nw.phases-1) {
				lt.turnOn = i + v.stop[j]
			}
		}
		s.feed[k] = s.drawn(k, lit.charge)
		input.charge += lit.charge
		input.square += lit.square
		area := nw.node(&m.q)
		nodeArea += area
		var cx vec
		for i := range n {
			for j := range n {
				cx[i] += m.x[i*n+j] * s.weight(j)
			}
		}
		nodeSquare += nw.node(&cx)
		for b := range nw.banks {
			at := nw.phases + b
			bankArea[b] += m.q[at]
			bankSquare[b] += nw.capacitance[b] * nw.capacitance[b] * m.y[at*n+at]
		}
		s.extremes(k, &m.y0, &legs, &out)
	}
	s.feeds = s.count
	solved := s.horizon * c.Period
	s.report(c, sol, &legs, &input, &out)
	mean := nodeArea / solved
	vo := s.ref.node + mean
	sol.OutputMean = vo
	load := c.load(vo)
	variance := math.Max(0, nodeSquare/solved-mean*mean)
	sol.OutputPower = vo*load + c.Conductance*variance
	for b := range nw.banks {
		sol.BankMean[b] = s.ref.v + bankArea[b]/solved
		sol.BankRMS[b] = math.Sqrt(math.Max(0, bankSquare[b]) / solved)
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
		if v.top.pos[j] == High {
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

// report fills the legs, the input and the output range.
func (s *Solver) report(c *Circuit, sol *Solution, legs *[MaxPhases]legTally, input *tally, out *extent) {
	sol.Duty = s.duty
	sol.Residual = s.closure
	sol.Iterations = s.rounds
	sol.OutputMin = s.ref.node + out.least
	sol.OutputMax = s.ref.node + out.most
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
		ls.Peak, ls.Valley = lt.range_.most, lt.range_.least
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
	scale := math.Max(math.Max(math.Abs(sol.InputPower), math.Abs(sol.OutputPower)), c.Vin*high)
	sol.EnergyBalance = 0
	if residual := sol.InputPower - sol.OutputPower - loss; residual != 0 {
		sol.EnergyBalance = math.Abs(residual) / scale
	}
}
