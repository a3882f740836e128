package switched

import "math"

const (
	maxRounds   = 100
	zeroCurrent = 1e-12 // [1] of a period; the end of conduction is found to this, its effect is of second order
	dropAllowed = 1e-6  // [1] of the greatest current: what may be dropped there
)

// settleResting finds the state in discontinuous conduction.
//
// For given ends of conduction the circuit is a fixed sequence of linear
// intervals; the current left at such an end is dropped. The end is then moved
// to where the current is zero by Newton's step on the exact solution. A wrong
// end drops or holds back a charge of second order only, so the steps of several
// phases need no coupling and converge quadratically.
func (s *Solver) settleResting(c *Circuit, duty float64) Status {
	v := s.firstEnds(c, duty)
	var ends [MaxPhases]ending
	for range maxRounds {
		s.rounds++
		s.ref.set(&s.nw, v, 0)
		s.schedule(c, duty)
		if !s.periodic(c) {
			return NotConverged
		}
		v += s.iv[0].start[s.nw.phases]
		moved, dropped, current := 0.0, 0.0, 0.0
		for k := range s.count {
			for j := range c.Phases {
				if s.iv[k].top.pos[j] != rectifying || s.next(k, j) == rectifying || !c.leg(j).Rectifier.Blocks {
					continue
				}
				p := s.legOf(j)
				at, left := s.conduct[p], s.iv[k].stop[j]
				current = max(current, math.Abs(s.iv[k].start[j]))
				if left >= 0 && at == 1 {
					ends[p] = ending{at, left, true}
					continue // conducts all the time
				}
				var slope vec
				s.iv[k].top.slope(&s.nw, &s.iv[k].stop, &slope)
				to := ends[p].next(duty, at, left, -slope[j]*c.Period)
				s.conduct[p] = to
				moved = max(moved, math.Abs(to-at)/to)
				dropped = max(dropped, math.Abs(left))
			}
		}
		if moved <= zeroCurrent {
			if dropped <= dropAllowed*current {
				return Solved
			}
			break
		}
	}
	if v <= 0 {
		return NoOperatingPoint // the load pulls the output down faster than the stage fills it
	}
	return NotConverged
}

// firstEnds sets the ends of conduction to start with, where none are known, and
// returns the output voltage to count from: that of the solution at hand, or the
// lossless circuit's.
func (s *Solver) firstEnds(c *Circuit, duty float64) float64 {
	v := s.ref.v
	known := s.rests(c)
	legs := c.Phases
	if s.cyclic {
		legs = 1
	}
	for p := range legs {
		rect := &c.leg(p).Rectifier
		if !rect.Blocks || known && s.conduct[p] > duty {
			continue
		}
		v = c.restingOutput(p, duty)
		s.conduct[p] = min(1, duty*(1+max(0, c.Vin-v)/(v+rect.Threshold)))
		if !(s.conduct[p] > duty && v > 0) {
			s.conduct[p] = 0.5 * (1 + duty)
		}
	}
	return v
}

// ending is where conduction ended in the round before and what current was left.
type ending struct {
	at, left float64
	known    bool
}

// next takes Newton's step from the end at, where the current left falls at the
// given rate per period, and remembers. When the current has changed its sign
// since the round before and Newton would go back there, the chord divides the
// stretch between.
func (e *ending) next(duty, at, left, fall float64) float64 {
	before := *e
	*e = ending{at, left, true}
	to := at + left/fall
	switch {
	case left == 0:
		return at
	case !(fall > 0) && left > 0:
		return 1 // it rises
	case !(fall > 0):
		return 0.5 * (duty + at)
	case before.known && before.at != at && (before.left < 0) != (left < 0) && math.Abs(to-at) > 0.9*math.Abs(before.at-at):
		to = at - left*(at-before.at)/(left-before.left)
	}
	if to > 1 {
		return 1
	}
	if !(to > duty) {
		return 0.5 * (duty + at)
	}
	return to
}
