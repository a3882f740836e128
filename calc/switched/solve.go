package switched

import "math"

const (
	maxSearch     = 60
	outputReach   = 1e-13 // [1] regulated mean output: sought deviation from its target
	outputAccept  = 1e-11 // [1] accepted one, when rounding stops the search
	solvedBalance = 1e-6  // [1] energy balance beyond which an answer is none
)

// FixedDuty solves the circuit with the high side on for the fraction duty of
// every period.
func (s *Solver) FixedDuty(c *Circuit, duty float64, sol *Solution) {
	if s.fast.takes(c) && s.fast.fixed(c, duty, sol) {
		s.closed, s.feeds = true, 0
		s.fast.outputRange(sol)
		return
	}
	s.prepare(c)
	if c.idle() {
		s.standStill(c, duty, Solved, sol)
		return
	}
	s.finish(c, s.settle(c, duty), sol)
}

// Regulated solves the circuit at the duty ratio, between dutyLeast and
// dutyGreatest, that makes the mean output voltage vout.
func (s *Solver) Regulated(c *Circuit, vout, dutyLeast, dutyGreatest float64, sol *Solution) {
	if s.fast.takes(c) && s.fast.regulated(c, vout, dutyLeast, dutyGreatest, sol) {
		s.closed, s.feeds = true, 0
		s.fast.outputRange(sol)
		return
	}
	s.prepare(c)
	if c.idle() {
		switch {
		case vout < c.Vin:
			s.standStill(c, dutyLeast, TooShortOnTime, sol)
		default:
			s.standStill(c, dutyGreatest, DropOut, sol)
		}
		return
	}
	s.finish(c, s.regulate(c, vout, dutyLeast, dutyGreatest), sol)
}

// clear empties the solution.
func (sol *Solution) clear(status Status, rounds int, duty float64) {
	*sol = Solution{Status: status, Iterations: rounds, Duty: duty}
}

// idle tells that nothing takes charge from the output: no load, and no
// rectifier that conducts backwards.
func (c *Circuit) idle() bool {
	for p := range c.Phases {
		if !c.leg(p).Rectifier.Blocks {
			return false
		}
	}
	return c.Current == 0 && c.Conductance == 0
}

// standStill writes the state of an idle circuit: the output has risen to the
// input and no current flows at all.
func (s *Solver) standStill(c *Circuit, duty float64, status Status, sol *Solution) {
	*sol = Solution{Status: status, Duty: duty, OutputMean: c.Vin, OutputMin: c.Vin, OutputMax: c.Vin}
	for k := range c.Banks {
		sol.BankMean[k] = c.Vin
	}
	sol.Leg.Mode = Discontinuous
	if c.Legs != nil {
		for p := range c.Phases {
			sol.Legs[p].Mode = Discontinuous
		}
	}
	s.feed[0] = feed{t: c.Period}
	s.feeds, s.count = 1, 0
	if !(c.Vin > 0 && c.Vin < math.MaxFloat64) {
		sol.Status = NotConverged
	}
}

// finish measures the state and checks the answer itself.
func (s *Solver) finish(c *Circuit, status Status, sol *Solution) {
	sol.clear(status, s.rounds, s.duty)
	if status == NotConverged || status == NoOperatingPoint {
		return
	}
	out := extent{math.Inf(1), math.Inf(-1)}
	s.measure(c, sol, &out)
	sol.OutputMin = s.ref.node + out.least
	sol.OutputMax = s.ref.node + out.most
	switch {
	case !(sol.EnergyBalance <= solvedBalance && sol.OutputMax < math.MaxFloat64 && sol.Leg.Peak < math.MaxFloat64):
		sol.Status = NotConverged
	case sol.OutputMean <= 0:
		sol.Status = NoOperatingPoint
	}
}

// regulate searches the duty ratio. The mean output rises with it. The first
// guess is the averaged circuit's, the next follows the averaged slope, the rest
// the secant, all inside a bracket.
func (s *Solver) regulate(c *Circuit, vout, least, greatest float64) Status {
	if c.Legs == nil && c.Leg.Rectifier.Blocks && vout < c.Vin {
		if t1, t2 := c.firstRest(vout); t1+t2 < c.Period {
			if change, ok := s.joint(c, vout, least, greatest, t1/c.Period, (t1+t2)/c.Period, jointRounds); ok && change <= outputAccept {
				return Solved
			}
			s.forget()
		}
	}
	lo, hi := least, greatest
	var atLeast, atGreatest bool
	d, slope := s.firstDuty(c, vout)
	d = min(max(d, lo), hi)
	var before, wasD float64
	for i := range maxSearch {
		status := s.settle(c, d)
		e := -vout
		switch status {
		case Solved:
			e = s.meanOutput(c) - vout
		case NoOperatingPoint:
			if d >= greatest {
				return status
			}
			s.forget()
		default:
			return status
		}
		if math.Abs(e) <= outputReach*vout {
			return Solved
		}
		if i > 0 && d != wasD {
			if q := (e - before) / (d - wasD); q > 0 {
				slope = q
			}
		}
		if e < 0 {
			if d >= greatest {
				return DropOut
			}
			lo = d
			atLeast = true
		} else {
			if d <= least {
				return TooShortOnTime
			}
			hi = d
			atGreatest = true
		}
		next := d - e/slope
		switch {
		case next == d:
			return s.near(e, vout)
		case next <= lo && e > 0, next >= hi && e < 0:
			// the step leaves the bracket: try the end of the range, or halve
			switch {
			case e > 0 && !atLeast:
				next = lo
			case e < 0 && !atGreatest:
				next = hi
			default:
				next = 0.5 * (lo + hi)
			}
		}
		if hi-lo <= 4e-16*hi {
			return s.near(e, vout)
		}
		before, wasD = e, d
		d = next
	}
	return NotConverged
}

func (s *Solver) near(e, vout float64) Status {
	if math.Abs(e) <= outputAccept*vout {
		return Solved
	}
	return NotConverged
}

// firstDuty returns a duty ratio to start with and the slope dV/dD there.
func (s *Solver) firstDuty(c *Circuit, vout float64) (d, slope float64) {
	leg := c.leg(0)
	vf := leg.Rectifier.Threshold
	i := c.load(vout) / float64(c.Phases)
	d = (vout + vf + i*(leg.Winding+leg.Rectifier.Slope)) / (c.Vin + vf - (leg.HighSide-leg.Rectifier.Slope)*i)
	slope = (c.Vin + vf - (leg.HighSide-leg.Rectifier.Slope)*i) / (1 + c.Conductance*(leg.Winding+leg.Rectifier.Slope)/float64(c.Phases))
	if leg.Rectifier.Blocks && vout < c.Vin {
		swing := (c.Vin - vout) * d * c.Period / leg.L
		if i < 0.5*swing {
			d = min(d, c.restingDuty(0, vout))
			slope = c.restingSlope(vout, d)
		}
	}
	return d, slope
}

// meanOutput returns the mean node voltage of the periodic state at hand.
func (s *Solver) meanOutput(c *Circuit) float64 {
	nw, n := &s.nw, s.nw.n
	if nw.phases == 1 && s.conduct[0] == 1 {
		return s.meanByVoltSeconds(c)
	}
	sum := 0.0
	for k := range s.count {
		v := &s.iv[k]
		ld := s.rungs(k)
		var y, eq vec
		v.top.slope(nw, &v.start, &y)
		ce := &s.work
		ce.set(ld, ld.cell, &v.start, &y, n)
		var q vec
		for i := range n {
			for j := 0; j <= ce.order; j += 2 {
				q[i] += ce.c[j][i] * inverse[j+1]
			}
			q[i] *= ce.h
		}
		for l := ld.cell; l < ld.levels; l++ {
			apply(&ld.f[l], &q, &eq, n)
			for i := range n {
				q[i] += q[i] + eq[i] + ld.h[l]*ld.d[l][i]
			}
		}
		sum += nw.node(&q)
	}
	return s.ref.node + sum/(s.horizon*c.Period)
}

// meanByVoltSeconds is the mean output of one phase in continuous conduction:
// the inductor's volt-seconds over a period vanish,
//
//	V + V_F + I (R_w + R_r) + (R_hs − R_r) q/T = D (Vin + V_F),  I = I_0 + G V
//
// with the charge q through the high side.
func (s *Solver) meanByVoltSeconds(c *Circuit) float64 {
	leg := c.leg(0)
	vf := leg.Rectifier.Threshold
	q := 0.0
	for k := range s.count {
		if v := &s.iv[k]; v.top.pos[0] == high {
			i := s.kirchhoff(k)
			q += i.mean(v, s.nw.n) + s.ref.i[0]*v.t
		}
	}
	r := leg.Winding + leg.Rectifier.Slope
	return (s.duty*(c.Vin+vf) - vf - r*c.Current - (leg.HighSide-leg.Rectifier.Slope)*q/c.Period) / (1 + r*c.Conductance)
}
