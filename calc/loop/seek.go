package loop

import (
	"math"

	"railproof/calc/statespace"
	"railproof/calc/switched"
)

// held is what the search for the switching instants holds while the reference
// follows: the mean output, or the sum of all on-times.
type held struct {
	output float64 // [V]
	on     float64 // [s] 0: the output is held
}

const (
	seekRounds  = 150   // [1] five are usual, a few more where a phase changes its conduction mode
	seekWithin  = 1e-7  // [1] of a period: the change of an instant by a whole step that is the last; Newton's next would be its square
	restWithin  = 1e-10 // [1] of a period: that by a part of a step, and the change of the rest of equal phases that is not made any more
	restEnough  = 1e-8  // [1] at which it is not either, if rounding keeps it from getting smaller
	valleyZero  = 1e-12 // [1] of the greatest current: a valley this far below zero is none
	firstGuess  = 0.1   // [1] of the time that is left, where there is nothing better to start from
	wholeSteps  = 20    // [1] rounds with whole steps
	halfSteps   = 80    // [1] rounds up to which they are halves, then quarters
	leftToLimit = 0.5   // [1] of the way to where a phase would not switch at all that one step may go
)

// seek finds the instants at which the comparators of unequal phases decide, each by
// itself, in the periodic solution with the mean output of the operating point.
// Behind a source the sum of the on-times is held instead: the source takes a little
// of the voltage, and the operating point is that of the duty ratio, as it is for
// equal phases.
func (s *Sampled) seek() Status {
	t, p := &s.instants, &s.plant
	c := &p.Circuit
	for k := range c.Phases {
		t.on[k], t.rest[k] = p.Duty*c.Period, math.Inf(1)
		if rectifier := &s.legs[k].Rectifier; p.mode(k) == switched.Discontinuous {
			t.restAt(k, c.Period, t.on[k]*(c.Vin+rectifier.Threshold)/(p.Output+rectifier.Threshold))
		}
	}
	stiff := *p
	stiff.Source = Source{}
	status := s.converge(&stiff, held{output: p.Output})
	if !status.OK() || !p.Source.Present {
		return status
	}
	sum := 0.0
	for k := range c.Phases {
		sum += t.on[k]
	}
	return s.converge(p, held{on: sum})
}

// stride is the part of a step that a round takes. Where a decision passes another
// edge the equations have a kink, about which whole steps may go to and fro for good.
func stride(round int) float64 {
	switch {
	case round < wholeSteps:
		return 1
	case round < halfSteps:
		return 0.5
	}
	return 0.25
}

// restAt sets where a current comes to rest: nowhere, if that is not before the next
// clock, and not before the turn-off.
func (t *instants) restAt(k int, period, at float64) {
	switch {
	case at >= period:
		at = math.Inf(1)
	case !(at > t.on[k]):
		at = t.on[k] + (min(t.rest[k], period)-t.on[k])/2
	}
	t.rest[k] = at
}

// converge moves the instants by Newton's method. For given instants all is linear:
// the state and the reference follow from the closure of the period and the first
// comparator. The instants then have to satisfy the others, and what is held.
func (s *Sampled) converge(p *Plant, h held) Status {
	s.bind(p, true)
	for n := range seekRounds {
		s.window.lay(p, &s.instants)
		if status := s.follow(); !status.OK() {
			return status
		}
		moved, ok := s.step(p, h, stride(n))
		if !ok {
			return SingularPoint
		}
		moved /= p.Circuit.Period
		if moved <= restWithin || moved <= seekWithin && n < wholeSteps {
			return Analysed
		}
	}
	return NotConverged
}

// step takes a part of Newton's step and returns the greatest change of an instant that
// the whole would have made.
func (s *Sampled) step(p *Plant, h held, share float64) (moved float64, ok bool) {
	j := &s.joint
	n, width, phases := j.Integral, j.N+Inputs, s.count
	sense := p.sense()

	// How state and reference follow the delay of each decision.
	var follow [switched.MaxPhases]statespace.Functional
	for e := range phases {
		var b statespace.Point
		s.equations(&b)
		b = s.decisions[e].enter
		b[n] = 0
		if e == 0 {
			b[n] = s.decisions[0].slope
		}
		if !s.matrix.Solve(&b) {
			return 0, false
		}
		copy(follow[e][:n], b[:n])
		follow[e][j.N+InputReference] = b[n]
	}
	change := func(f *statespace.Functional, e int) float64 {
		sum := 0.0
		for i := range width {
			sum += float64(f[i] * follow[e][i])
		}
		return sum
	}

	var newton statespace.Real
	var delay statespace.Point
	newton.N = phases
	for k := 1; k < phases; k++ {
		d := &s.decisions[k]
		delay[k] = p.RampSlope()*d.since - (d.control.At(&s.start, width) - sense*d.current.At(&s.start, width))
		for e := range phases {
			x := change(&d.control, e) - sense*change(&d.current, e)
			switch {
			case e < k:
				x += d.voltage[e] - sense*d.amperes[e]
			case e == k:
				x -= d.slope
			}
			newton.Set(k, e, x)
		}
	}
	if h.on > 0 {
		delay[0] = h.on
		for e := range phases {
			delay[0] -= s.instants.on[e]
			newton.Set(0, e, 1)
		}
	} else {
		var area statespace.Functional
		copy(area[:width], s.whole.F[j.Integral*width:])
		delay[0] = h.output*p.Circuit.Period - area.At(&s.start, width)
		for e := range phases {
			newton.Set(0, e, change(&area, e)+s.decisions[e].enter[j.Integral])
		}
	}
	if !newton.Solve(&delay) {
		return 0, false
	}
	return s.move(p, delay[:phases], share, change), true
}

// move delays the decisions, no further than a part of the way to where one would
// not switch, and lets the rests follow.
func (s *Sampled) move(p *Plant, delay []float64, share float64, change func(f *statespace.Functional, e int) float64) (moved float64) {
	t, period := &s.instants, p.Circuit.Period
	for e, by := range delay {
		on := t.on[s.decisions[e].phase]
		if room := leftToLimit * (on - p.Modulator.Delay); by < -room {
			share = min(share, -room/by)
		}
		if room := leftToLimit * (period - on); by > room {
			share = min(share, room/by)
		}
	}
	greatest := 0.0
	for k := range delay {
		greatest = max(greatest, math.Abs(s.rests[k].off), math.Abs(s.rests[k].valley))
	}
	for k := range delay {
		r := &s.rests[k]
		switch {
		case t.rest[k] < period:
			left := r.left
			for e, by := range delay {
				left += share * by * (change(&r.current, e) + r.delayed[e])
			}
			to := t.rest[k] + left/r.fall
			if !(r.fall > 0) {
				to = period
			}
			moved = max(moved, math.Abs(to-t.rest[k]))
			t.restAt(k, period, to)
		case s.legs[k].Rectifier.Blocks && r.valley < -valleyZero*greatest:
			off := t.on[k]
			moved = period
			t.restAt(k, period, off+(period-off)*max(firstGuess, r.off/(r.off-r.valley)))
		}
	}
	for e, by := range delay {
		moved = max(moved, math.Abs(by))
		t.on[s.decisions[e].phase] += share * by
	}
	return moved
}
