package switched

import "math"

const jointRounds = 20

// joint seeks the duty ratio d and the end of conduction z of equal phases in
// discontinuous conduction together, such that the mean output is vout. Each
// round solves exactly for given d and z, then moves z by Newton's step and d by
// the averaged slope first, the secant later; z keeps its ratio to d, as it does
// when voltages stay. It reports false when it leaves the mode or the range, for
// the nested search to take over, and else how far the next step would go.
func (s *Solver) joint(c *Circuit, vout, least, greatest, d, z float64, rounds int) (change float64, ok bool) {
	var was, before float64
	slope := c.restingSlope(vout, d)
	for n := range rounds {
		if !(d > least && d < greatest && z > d && z < 1) {
			return 0, false
		}
		s.rounds++
		s.conduct[0] = z
		s.ref.set(&s.nw, vout, 0)
		s.schedule(c, d)
		if !s.periodic(c) {
			return 0, false
		}
		e := s.meanOutput(c) - vout
		left, fall := s.leftAtEnd(c)
		if !(fall > 0) {
			return 0, false
		}
		if n > 0 && d != was {
			if q := (e - before) / (d - was); q > 0.3*slope && q < 3*slope {
				slope = q
			}
		}
		to := d - e/slope
		dz := left / fall
		change = math.Abs(to-d)/d + math.Abs(dz)/z
		if math.Abs(e) <= outputReach*vout && math.Abs(dz) <= zeroCurrent || n == rounds-1 {
			return change, true
		}
		was, before = d, e
		z = (z + dz) * (to / d)
		d = to
	}
	return 0, false
}

// leftAtEnd returns the current left when conduction ends and how fast, per
// period, it falls there.
func (s *Solver) leftAtEnd(c *Circuit) (left, fall float64) {
	for k := range s.count {
		for j := range c.Phases {
			if s.iv[k].top.pos[j] == rectifying && s.next(k, j) == resting {
				var slope vec
				s.iv[k].top.slope(&s.nw, &s.iv[k].stop, &slope)
				return s.iv[k].stop[j], -slope[j] * c.Period
			}
		}
	}
	return 0, 0
}

// restingSlope returns dV/dD in discontinuous conduction, from
// I = D² T (Vin−V)(Vin+V_F)/(2L(V+V_F)) for each phase:
//
//	2 dD/D = dV [1/(Vin−V) + 1/(V+V_F) + G/I]
func (c *Circuit) restingSlope(v, duty float64) float64 {
	return 2 / (duty * (1/(c.Vin-v) + 1/(v+c.Leg.Rectifier.Threshold) + c.Conductance/max(c.load(v), math.SmallestNonzeroFloat64)))
}
