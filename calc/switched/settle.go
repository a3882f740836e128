package switched

import "math"

// load returns the current that the load takes at the output voltage v.
func (c *Circuit) load(v float64) float64 { return c.Current + c.Conductance*v }

// averagedOutput returns the mean output voltage of the averaged circuit in
// continuous conduction, in which every current is its mean:
//
//	V + V_F + I (R_w + R_r) + (R_hs − R_r) D I = D (Vin + V_F),  I = (I_0 + G V)/N
//
// It is where deviations are counted from, not a result.
func (c *Circuit) averagedOutput(duty float64) float64 {
	leg := &c.Leg
	if c.Legs != nil {
		leg = &c.Legs[0]
	}
	r := (leg.Winding + leg.Rectifier.Slope + duty*(leg.HighSide-leg.Rectifier.Slope)) / float64(c.Phases)
	vf := leg.Rectifier.Threshold
	return (duty*(c.Vin+vf) - vf - r*c.Current) / (1 + r*c.Conductance)
}

// restingOutput returns the output voltage of the lossless circuit with constant
// output voltage in discontinuous conduction, where the charge per period is
//
//	(I_0 + G V)/N = D² T (Vin − V)(Vin + V_F) / (2 L (V + V_F))
//
// a quadratic in V (derived). It only starts the search.
func (c *Circuit) restingOutput(p int, duty float64) float64 {
	leg := c.leg(p)
	vf := leg.Rectifier.Threshold
	k := 2 * leg.L / (duty * duty * c.Period * (c.Vin + vf) * float64(c.Phases))
	a := c.Conductance * k
	b := 1 + k*(c.Current+c.Conductance*vf)
	q := c.Vin - k*c.Current*vf
	return 2 * q / (b + math.Sqrt(max(0, b*b+4*a*q)))
}

// restingDuty inverts restingOutput.
func (c *Circuit) restingDuty(p int, v float64) float64 {
	leg := c.leg(p)
	vf := leg.Rectifier.Threshold
	return math.Sqrt(2 * leg.L * c.load(v) * (v + vf) / (float64(c.Phases) * c.Period * (c.Vin - v) * (c.Vin + vf)))
}

// settle finds the periodic state at a duty ratio, in whatever conduction mode
// it has. It starts from the ends of conduction in conduct: all 1 after prepare,
// else those of a duty ratio nearby.
func (s *Solver) settle(c *Circuit, duty float64) Status {
	if !s.rests(c) {
		v := c.averagedOutput(duty)
		s.ref.set(&s.nw, v, c.load(v)/float64(c.Phases))
		s.schedule(c, duty)
		s.rounds++
		if !s.periodic(c) {
			return NotConverged
		}
		if !s.reverses(c) {
			return Solved
		}
	}
	return s.settleResting(c, duty)
}

// rests tells whether conduct has a leg whose conduction ends.
func (s *Solver) rests(c *Circuit) bool {
	for p := range c.Phases {
		if s.conduction(p) < 1 {
			return true
		}
	}
	return false
}

// forget lets every leg conduct all the time, the start of a search.
func (s *Solver) forget() {
	for p := range s.conduct {
		s.conduct[p] = 1
	}
}

// reverses tells whether a blocking rectifier is asked for reverse current.
func (s *Solver) reverses(c *Circuit) bool {
	for k := range s.count {
		for j := range c.Phases {
			if s.iv[k].top.pos[j] == rectifying && c.leg(j).Rectifier.Blocks && s.ref.i[j]+s.iv[k].stop[j] < 0 {
				return true
			}
		}
	}
	return false
}
