package service

import (
	"math"

	"railproof/calc/corners"
	"railproof/calc/evaluate"
	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/stage"
	"railproof/calc/transient"
)

// newLoadStep returns the step of a requirement; nil where none is asked.
func newLoadStep(r *stage.Requirement) *transient.Demand {
	if r == nil {
		return nil
	}
	d, asked := transient.DemandOf(r)
	if !asked {
		return nil
	}
	return &d
}

// stepExtension returns what follows the step, applied and removed, at a point: the
// greater deviation, the longer recovery and the greater peak. A step that cannot be
// followed leaves them without a value, one from which the output does not recover
// leaves the recovery without.
func stepExtension(d *transient.Demand) corners.Extension {
	f := &transient.Follower{Demand: *d}
	return func(e *evaluate.Evaluator, p *stage.Point, r *evaluate.Result) {
		deviation, recovery, peak := 0.0, 0.0, 0.0
		for _, applied := range [2]bool{true, false} {
			o, followed := f.Follow(e, p, applied)
			if !followed {
				deviation, recovery, peak = parts.Unknown, parts.Unknown, parts.Unknown
				break
			}
			deviation = math.Max(deviation, math.Max(o.Up, o.Down))
			recovery = math.Max(recovery, o.Recovery)
			peak = math.Max(peak, o.InductorPeak.Value)
		}
		r.Quantities[quantity.LoadStepDeviation], r.Quantities[quantity.LoadStepRecovery], r.Quantities[quantity.LoadStepPeak] = deviation, recovery, peak
	}
}
