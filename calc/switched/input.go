package switched

import "math"

// inputNode is the node of the input capacitors. The source supplies the mean
// input current, the banks the rest:
//
//	v_n = ρ (Σ g_k v_k + I_in − Σ_on i_p),   ρ = 1/Σ g_k
//
// It is driven by the phases and does not act back on them.
type inputNode struct {
	banks       int
	mean        float64 // [A] supplied by the source
	rho         float64
	couple      [MaxBanks]float64
	inject      [MaxBanks]float64
	relax       [MaxBanks][MaxBanks]float64
	capacitance [MaxBanks]float64
}

func (in *inputNode) set(banks int, bank *[MaxBanks]Bank, mean float64) {
	in.banks, in.mean = banks, mean
	sum := 0.0
	for k := range banks {
		sum += 1 / bank[k].ESR
	}
	in.rho = 1 / sum
	for k := range banks {
		g := 1 / bank[k].ESR
		in.couple[k] = g * in.rho
		in.capacitance[k] = bank[k].C
		in.inject[k] = in.couple[k] / bank[k].C
		own := 0.0
		for j := range banks {
			if j != k {
				in.relax[k][j] = in.inject[k] / bank[j].ESR
				own += in.relax[k][j]
			}
		}
		in.relax[k][k] = -own
	}
}

// drive adds the source terms and the stiffness of the input banks.
func (in *inputNode) drive(nw *network, ref *reference, tp *topology) {
	current := in.mean
	for p := range nw.phases {
		if tp.pos[p] == high {
			current -= ref.i[p]
		}
	}
	at := nw.phases + nw.banks
	for k := range in.banks {
		tp.b[at+k] = in.inject[k] * current
		tp.norm = max(tp.norm, -2*in.relax[k][k])
	}
}

func (in *inputNode) slope(nw *network, tp *topology, x, y *vec) {
	current := 0.0
	for p := range nw.phases {
		if tp.pos[p] == high {
			current += x[p]
		}
	}
	at := nw.phases + nw.banks
	for k := range in.banks {
		acc := tp.b[at+k] - in.inject[k]*current
		for j := range in.banks {
			acc += in.relax[k][j] * x[at+j]
		}
		y[at+k] = acc
	}
}

// matrix writes the rows of the input banks into A h.
func (in *inputNode) matrix(nw *network, tp *topology, h float64, b *square) {
	n, at := nw.n, nw.phases+nw.banks
	for k := range in.banks {
		row := b[(at+k)*n : (at+k)*n+n]
		for j := range row {
			row[j] = 0
		}
		for p := range nw.phases {
			if tp.pos[p] == high {
				row[p] = -in.inject[k] * h
			}
		}
		for j := range in.banks {
			row[at+j] = in.relax[k][j] * h
		}
	}
}

// pin replaces the last equation of the periodic state, which the others imply,
// by one for the charge of the banks: none at the start. Only the voltage's
// alternating part is meant.
func (in *inputNode) pin(nw *network, a *square, b *vec) {
	n := nw.n
	last := n - 1
	for j := range n {
		a[last*n+j] = 0
	}
	for k := range in.banks {
		a[last*n+n-in.banks+k] = in.capacitance[k]
	}
	b[last] = 0
}

// InputSolution describes the input capacitors of a solved circuit.
type InputSolution struct {
	RMS      float64           // [A] of what all banks carry together
	BankRMS  [MaxBanks]float64 // [A]
	RipplePP float64           // [V] at the node of the banks
}

// feed is what one interval draws from the input node.
type feed struct {
	t      float64
	charge float64
	i0, i1 float64 // current as it begins, as it ends
	d0, d1 float64 // its rate
}

// InputBanks computes how 1 to MaxBanks input banks, at one node, share the
// alternating part of the input current of the solution sol that this Solver
// found last, for the same circuit. It reports false if there is none.
func (s *Solver) InputBanks(c *Circuit, sol *Solution, banks int, bank *[MaxBanks]Bank, dst *InputSolution) bool {
	dst.RMS = math.Sqrt(max(0, sol.InputRMS*sol.InputRMS-sol.InputMean*sol.InputMean))
	if sol.InputRMS == 0 {
		*dst = InputSolution{}
		return true
	}
	if banks == 1 {
		dst.BankRMS[0] = dst.RMS
		if pp, ok := s.ripple(&bank[0], sol.InputMean); ok {
			dst.RipplePP = pp
			return true
		}
	}
	return s.shareInput(c, sol, banks, bank, dst)
}

// ripple is the closed form for one bank: with the charge q drawn so far,
//
//	v_n = (I_in t − q)/C + ESR (I_in − i)
//
// whose extremes are at edges unless its rate changes sign inside an interval.
func (s *Solver) ripple(b *Bank, mean float64) (pp float64, ok bool) {
	closed := s.closed
	if closed && s.feeds == 0 {
		s.fast.feed(s)
	}
	q := 0.0
	e := extent{math.Inf(1), math.Inf(-1)}
	for k := range s.feeds {
		f := &s.feed[k]
		r0 := mean - f.i0 - b.ESR*b.C*f.d0
		r1 := mean - f.i1 - b.ESR*b.C*f.d1
		if (r0 < 0) != (r1 < 0) {
			if !closed {
				return 0, false
			}
			s.fast.turning(b, mean, &e)
		}
		e.add(q/b.C + b.ESR*(mean-f.i0))
		q += mean*f.t - f.charge
		e.add(q/b.C + b.ESR*(mean-f.i1))
	}
	return e.most - e.least, true
}

// shareInput solves the circuit together with its input banks.
func (s *Solver) shareInput(c *Circuit, sol *Solution, banks int, bank *[MaxBanks]Bank, dst *InputSolution) bool {
	if closed := s.closed; closed || s.workspace == nil || s.count == 0 {
		s.prepare(c)
		s.closed = closed // the closed form still holds its own
		if s.settle(c, sol.Duty) != Solved {
			return false
		}
	}
	nw := &s.nw
	if banks == 2 && nw.input.banks == 0 && s.sharePair(sol, bank, dst) {
		return true
	}
	nw.input.set(banks, bank, sol.InputMean)
	nw.n = nw.phases + nw.banks + banks
	if !s.periodic(c) {
		return false
	}
	n, at := nw.n, nw.phases+nw.banks
	var square [MaxBanks]float64
	all := extent{math.Inf(1), math.Inf(-1)}
	for k := range s.count {
		v := &s.iv[k]
		s.moments.rates(s, k)
		for b := range banks {
			i := at + b
			square[b] += nw.input.capacitance[b] * nw.input.capacitance[b] * s.moments.y[i*n+i]
		}
		w := &s.watches[0].w
		*w = vec{}
		s.watches[0].only = -1
		offset := nw.input.mean
		for p := range nw.phases {
			if v.top.pos[p] == high {
				w[p] = -nw.input.rho
				offset -= s.ref.i[p]
			}
		}
		for b := range banks {
			w[at+b] = nw.input.couple[b]
		}
		s.scan(k, &s.moments.y0, 1)
		offset *= nw.input.rho
		all.add(offset + s.watches[0].span.least)
		all.add(offset + s.watches[0].span.most)
	}
	for b := range banks {
		dst.BankRMS[b] = math.Sqrt(square[b] / (s.horizon * c.Period))
	}
	dst.RipplePP = all.most - all.least
	return true
}

// feed writes the intervals of the closed form.
func (ob *oneBank) feed(s *Solver) {
	on := &ob.on
	d0, d1 := on.ci.ends(on.order)
	s.feed[0] = feed{ob.t1, ob.t1 * (ob.i + on.ci.mean(on.order)), ob.i + on.i0, ob.i + on.i1, d0 / on.h, d1 / on.h}
	s.feed[1] = feed{t: ob.t2 + ob.t3}
	s.feeds = 2
}

// turning adds the extreme inside the on-time of the closed form, whose voltage
// at one input bank is again a series.
func (ob *oneBank) turning(b *Bank, mean float64, e *extent) {
	on := &ob.on
	ob.mix = taylor{}
	q := on.h / b.C
	ob.mix[1] = (mean - ob.i) * q
	ob.mix[0] = b.ESR * (mean - ob.i)
	for k := 0; k < on.order; k++ {
		ob.mix[k+1] -= on.ci[k] * q * inverse[k+1]
	}
	start, sign := 0.0, 1.0
	for k := 1; k <= on.order; k++ {
		sign = -sign
		start += sign * ob.mix[k]
	}
	ob.mix[0] -= start // the charge counts from the start, x = −1
	for k := 0; k <= on.order; k++ {
		ob.mix[k] -= b.ESR * on.ci[k]
	}
	ob.mix.extremes(on.order, e)
}
