package switched

import "math"

// Approach makes one step from the solution in sol, of a circuit nearby or a
// guess of its Duty, Leg.Mode, Leg.Conduct and Leg.HighSide.Mean, towards what
// Regulated finds, and returns how far, relative, the next one would move the
// duty ratio. At 1e-12 or less sol is Regulated's answer; before, it is an exact
// solution at a duty ratio that is a little off. Those who change the circuit in
// turn with solving it need one solution per turn in this way.
//
// Where a step does not serve (a limit of the duty ratio, a change of mode,
// several phases in continuous conduction or unequal ones) Approach is Regulated
// and returns 0.
//
// Approach leaves OutputMin and OutputMax to OutputRange, which serves once at
// the end.
func (s *Solver) Approach(c *Circuit, vout, dutyLeast, dutyGreatest float64, sol *Solution) (change float64) {
	ok := false
	switch {
	case c.Legs != nil || c.idle():
	case sol.Leg.Mode == Continuous && c.Phases == 1:
		change, ok = s.approachContinuous(c, vout, dutyLeast, dutyGreatest, sol)
	case sol.Leg.Mode == Discontinuous && s.fast.takes(c):
		s.fast.set(c)
		change, ok = s.fast.approachResting(c, vout, dutyLeast, dutyGreatest, sol)
		s.closed, s.feeds = true, 0
	case sol.Leg.Mode == Discontinuous:
		change, ok = s.approachResting(c, vout, dutyLeast, dutyGreatest, sol)
	}
	if ok {
		return change
	}
	s.Regulated(c, vout, dutyLeast, dutyGreatest, sol)
	return 0
}

// OutputRange writes the range of the output voltage of the solution that this
// Solver found last, if it is sol.
func (s *Solver) OutputRange(sol *Solution) {
	if s.closed {
		s.fast.outputRange(sol)
		return
	}
	if s.workspace != nil && s.count > 0 && sol.Status != NotConverged {
		out := s.nodeRange()
		sol.OutputMin, sol.OutputMax = s.ref.node+out.least, s.ref.node+out.most
	}
}

// In the closed form a second step costs less than being called again.
const (
	approachSteps  = 2
	approachEnough = 1e-9 // [1] relative change of the duty ratio
)

// approachContinuous takes the duty ratio from the volt-second balance with the
// charge through the high side that sol has, as regulated does.
func (s *Solver) approachContinuous(c *Circuit, vout, least, greatest float64, sol *Solution) (change float64, ok bool) {
	vs := c.voltSeconds(vout)
	d := vs.next(sol.Duty, sol.Leg.HighSide.Mean)
	if !(d > least && d < greatest && vout > 0) {
		return 0, false
	}
	ob := &s.fast
	if ob.takes(c) {
		ob.set(c)
		for sol.Iterations = 1; ; sol.Iterations++ {
			if !ob.continuous(c, d, vout) || c.Leg.Rectifier.Blocks && ob.i+ob.off.i1 < 0 {
				return 0, false
			}
			next := vs.next(d, d*(vs.load+ob.on.ci.mean(ob.on.order)))
			if sol.Iterations == approachSteps || math.Abs(next-d) <= approachEnough*d {
				break
			}
			d = next
		}
		ob.report(c, sol)
		s.closed, s.feeds = true, 0
	} else {
		s.prepare(c)
		if s.settle(c, d) != Solved || s.conduct[0] < 1 {
			return 0, false
		}
		if !s.takeStock(c, sol) {
			return 0, false
		}
	}
	if sol.Status != Solved {
		return 0, false
	}
	return math.Abs(vs.next(d, sol.Leg.HighSide.Mean)-d) / d, true
}

// approachResting takes one joint step of duty ratio and end of conduction and
// solves there.
func (s *Solver) approachResting(c *Circuit, vout, least, greatest float64, sol *Solution) (change float64, ok bool) {
	s.prepare(c)
	change, ok = s.joint(c, vout, least, greatest, sol.Duty, sol.Duty+sol.Leg.Conduct, 2)
	return change, ok && s.takeStock(c, sol)
}

// takeStock measures the state at hand but for the output's range, and reports
// whether it is a solution.
func (s *Solver) takeStock(c *Circuit, sol *Solution) bool {
	sol.clear(Solved, s.rounds, s.duty)
	s.measure(c, sol, nil)
	return sol.EnergyBalance <= solvedBalance && sol.OutputMean > 0
}

// approachResting takes one joint Newton step of on-time and conduction time and
// solves there.
func (ob *oneBank) approachResting(c *Circuit, vout, least, greatest float64, sol *Solution) (change float64, ok bool) {
	t1, t2 := sol.Duty*c.Period, sol.Leg.Conduct*c.Period
	for pass := range 2 {
		if !(t1 > least*c.Period && t1 < greatest*c.Period && t2 > 0) || !ob.resting(c, t1, t2, vout) {
			return 0, false
		}
		d1 := -ob.meanOfRest(c) / ob.gain
		d2 := -(ob.left + ob.push*d1) / ob.fall
		change = math.Abs(d1)/t1 + math.Abs(d2)/t2
		if pass == 0 && change > 1e-12 {
			t1 += d1
			t2 += d2
			continue
		}
		return change, ob.reportResting(c, sol, pass+1)
	}
	return 0, false
}
