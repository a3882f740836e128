package evaluate

import (
	"math"

	"railproof/calc/parts"
	"railproof/calc/stage"
)

// Nearest holds, for a point at which the stage does not work, where it begins to
// when one condition alone is changed; parts.Unknown where changing that
// condition does not help.
type Nearest struct {
	Input       float64 // [V]
	LoadCurrent float64 // [A]
	AmbientDegC float64 // [degC]
}

const (
	nearestScan      = 32     // [1] points tried on the way; a window narrower than their spacing is missed
	nearestSteps     = 48     // [1] halvings: the range shrinks below a rounding of its ends
	nearestTolerance = 1e-9   // [1] relative width at which the search ends
	coldestDegC      = -100.0 // [degC] end of the search downwards
)

// Nearest searches the operable condition nearest to a point whose evaluation
// ended in a status other than OK, by bisection on Eval.
func (e *Evaluator) Nearest(p *stage.Point, status Status) Nearest {
	n := Nearest{parts.Unknown, parts.Unknown, parts.Unknown}
	q := *p
	search := func(value *float64, from, to float64) float64 {
		defer func() { q = *p }()
		return e.turn(&q, value, from, to)
	}
	switch status {
	case DropOut:
		n.Input = search(&q.Input, p.Input, 10*p.Input)
		n.LoadCurrent = search(&q.Load.Current, p.Load.Current, 0)
	case TooShortOnTime:
		lowest := max(e.asked(p), p.Input/100)
		n.Input = search(&q.Input, p.Input, lowest)
		n.LoadCurrent = search(&q.Load.Current, p.Load.Current, max(1, 100*p.Load.Current))
	case NoOperatingPoint:
		n.LoadCurrent = search(&q.Load.Current, p.Load.Current, 0)
	case Runaway, OverTemperature:
		n.AmbientDegC = search(&q.AmbientDegC, p.AmbientDegC, coldestDegC)
		n.LoadCurrent = search(&q.Load.Current, p.Load.Current, 0)
	}
	return n
}

// turn returns the value nearest to from, on the way to to, at which the point q
// works. value points into q.
func (e *Evaluator) turn(q *stage.Point, value *float64, from, to float64) float64 {
	var r Result
	works := func(x float64) bool {
		*value = x
		e.Eval(q, &r)
		return r.Status == OK
	}
	bad, good := from, parts.Unknown
	for i := 1; i <= nearestScan; i++ {
		// denser near from, since the way may span decades
		share := float64(i) / nearestScan
		x := from + (to-from)*share*share*share
		if works(x) {
			good = x
			break
		}
		bad = x
	}
	if !parts.Known(good) {
		return good
	}
	for range nearestSteps {
		if math.Abs(good-bad) <= nearestTolerance*(math.Abs(good)+math.Abs(bad)) {
			break
		}
		if mid := (bad + good) / 2; works(mid) {
			good = mid
		} else {
			bad = mid
		}
	}
	return good
}
