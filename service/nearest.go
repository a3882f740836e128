package service

import (
	"math"

	"railproof/calc/evaluate"
	"railproof/calc/losses"
	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/stage"
)

// Nearest is where the stage begins to work when one condition alone is changed,
// and what it does as things are; NaN where nothing was found.
type Nearest struct {
	evaluate.Nearest
	Output float64 // [V] mean output voltage as things are
	Duty   float64 // [1] duty ratio as things are
	Detail string
}

// nearest looks for the operable conditions nearest to a point.
func nearest(e *evaluate.Evaluator, p *stage.Point, as *evaluate.Result) *Nearest {
	n := &Nearest{
		Nearest: e.Nearest(p, as.Status),
		Output:  as.Quantities[quantity.OutputMean], Duty: as.Quantities[quantity.DutyRatio],
		Detail: "each condition alone, all else equal, at which the stage begins to work",
	}
	if !parts.Known(n.Input) && !parts.Known(n.LoadCurrent) && !parts.Known(n.AmbientDegC) {
		n.Detail = "no input voltage, load or ambient temperature alone makes the stage work here"
	}
	return n
}

// Onset is where thermal runaway begins, all else equal; NaN where not found.
type Onset struct {
	Part        losses.Part
	AmbientDegC float64 // [degC]
	LoadCurrent float64 // [A]
	Input       float64 // [V] as things are
	Feedback    float64 // [1] thermal_feedback_ratio just before
	Detail      string
}

const (
	onsetSteps     = 40     // [1] halvings of the searched interval: 1e-12 of its width
	coldestAmbient = -100.0 // [degC] as the contract's bound
)

// onset searches the ambient temperature and the load at which runaway begins,
// and names the part whose temperature moves most with the ambient just before.
func onset(e *evaluate.Evaluator, p *stage.Point) *Onset {
	var r evaluate.Result
	q := *p
	search := func(value *float64, end float64) float64 {
		defer func() { q = *p }()
		return lastCalm(*value, end, func(x float64) bool {
			*value = x
			e.Eval(&q, &r)
			return r.Status.Figures()
		})
	}
	o := &Onset{AmbientDegC: search(&q.AmbientDegC, coldestAmbient), LoadCurrent: search(&q.Load.Current, 0), Input: p.Input, Feedback: parts.Unknown}
	o.Detail = "no stable equilibrium was found at any colder ambient or smaller load"
	if parts.Known(o.AmbientDegC) {
		q.AmbientDegC = o.AmbientDegC
		o.closer(e, q, "runaway begins just above this ambient temperature")
		q = *p
	}
	if parts.Known(o.LoadCurrent) {
		q.Load.Current = o.LoadCurrent
		o.closer(e, q, "runaway begins just above this load")
	}
	return o
}

// closer takes part and feedback from a point just before runaway, unless another
// point is nearer to the loss of stability.
func (o *Onset) closer(e *evaluate.Evaluator, p stage.Point, detail string) {
	part, feedback := fastest(e, p)
	if !(feedback <= o.Feedback) {
		o.Part, o.Feedback, o.Detail = part, feedback, detail
	}
}

// lastCalm halves the interval between a value at which calm does not hold and an
// end at which it does, and returns the last value at which it holds; NaN if it
// does not hold at the end either.
func lastCalm(wild, end float64, calm func(float64) bool) float64 {
	if !calm(end) {
		return parts.Unknown
	}
	for range onsetSteps {
		if middle := end + (wild-end)/2; calm(middle) {
			end = middle
		} else {
			wild = middle
		}
	}
	return end
}

// fastest returns the part whose temperature moves most with the ambient, and the
// thermal feedback there.
func fastest(e *evaluate.Evaluator, p stage.Point) (losses.Part, float64) {
	const step = 1e-2 // [K] well above the tolerance of the equilibrium
	p.AmbientDegC -= step
	var warm, cold evaluate.Result
	e.Eval(&p, &warm)
	p.AmbientDegC -= step
	e.Eval(&p, &cold)
	part, most := losses.HighSide, math.Inf(-1)
	for i := range warm.PartDegC {
		if rise := warm.PartDegC[i] - cold.PartDegC[i]; rise > most {
			part, most = losses.Part(i), rise
		}
	}
	return part, warm.Quantities[quantity.ThermalFeedback]
}
