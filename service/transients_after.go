package service

import (
	"math"

	"railproof/calc/evaluate"
	"railproof/calc/loop"
	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/stage"
)

// aftermath finds the steady state that follows an event.
type aftermath struct {
	evaluator *evaluate.Evaluator
	plant     loop.Plant
	sampled   loop.Sampled
	margins   loop.Margins
	mean      float64 // [V] output there; NaN: there is none
	status    evaluate.Status
}

// at evaluates the stage as it is after the event, with its mean output held at the
// given voltage [V]; parts.Unknown: by feedback.
func (b *aftermath) at(r *TransientsRequest, output float64) *evaluate.Result {
	p := r.Place.Point
	feedback := &b.evaluator.Stage().Feedback
	was := feedback.Reference
	defer func() { feedback.Reference = was }()
	switch v := &r.Event; v.Kind {
	case LoadStepEvent:
		if !parts.Known(v.BackAfter) {
			p.Load.Current = v.To
		}
	case InputStepEvent:
		p.Input = v.To
	case ReferenceStepEvent:
		feedback.Reference *= v.To
	}
	if parts.Known(output) {
		p.Control = stage.Control{Kind: stage.RegulateTo, Voltage: output}
	}
	result := new(evaluate.Result)
	b.evaluator.Eval(&p, result)
	b.plant.Bind(b.evaluator, result.Status)
	return result
}

const (
	errorRounds = 6     // [1] three are usual
	errorWithin = 1e-10 // [1] of the reference
)

// find sets the mean output that follows and returns whether the loop holds it.
// The amplifier's direct gain leaves the output off what the divider sets: sought
// is the output for which the loop needs the reference that there is.
func (b *aftermath) find(r *TransientsRequest) loop.Stability {
	b.mean = parts.Unknown
	result := b.at(r, parts.Unknown)
	b.status = result.Status
	for range errorRounds {
		if result.Status != evaluate.OK && result.Status != evaluate.OverTemperature || !b.sampled.Set(&b.plant).OK() {
			return loop.Undecided
		}
		output := result.Quantities[quantity.OutputMean]
		if math.Abs(b.sampled.Error) <= errorWithin {
			b.mean = output
			break
		}
		result = b.at(r, output/(1+b.sampled.Error))
	}
	b.sampled.Margins(&b.margins)
	return b.margins.Stability
}

// stability returns whether the loop holds the operating point of a plant.
func (b *aftermath) stability(p *loop.Plant) loop.Stability {
	if !b.sampled.Set(p).OK() {
		return loop.Undecided
	}
	b.sampled.Margins(&b.margins)
	return b.margins.Stability
}
