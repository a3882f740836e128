package service

import (
	"math"

	"railproof/calc/corners"
	"railproof/calc/evaluate"
	"railproof/calc/loop"
	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/stage"
	"railproof/calc/transient"
)

// loadStep is the load step of a requirement: between the greatest load and that
// less the step.
type loadStep struct {
	from, to float64 // [A]
	slew     float64 // [A/s]
	band     float64 // [V] half width of what counts as recovered
	recovery float64 // [s] allowed; parts.Unknown: not asked
}

// Length of a followed step, in periods.
const (
	stepAfter    = 2.3   // [1] periods before it, between two clocks
	leastFollow  = 60.0  // [1] the deviation of any loop that is worth its name comes well before
	mostFollow   = 800.0 // [1]
	recoveryBand = 0.01  // [1] half width of the band of recovery, over the output voltage
)

// newLoadStep returns the step of a requirement; nil where none is asked.
func newLoadStep(r *stage.Requirement) *loadStep {
	if r == nil || !(r.Targets.LoadStep.Step > 0) {
		return nil
	}
	s := &r.Targets.LoadStep
	return &loadStep{from: math.Max(r.LoadCurrent.Min, r.LoadCurrent.Max-s.Step), to: r.LoadCurrent.Max, slew: s.Slew, band: recoveryBand * r.Output, recovery: s.Recovery}
}

// extension returns what follows the step, applied and removed, at a point: the
// greater deviation, the longer recovery and the greater peak. A step that cannot be
// followed leaves them without a value, one from which the output does not recover
// leaves the recovery without.
func (l *loadStep) extension() corners.Extension {
	var result evaluate.Result
	run := new(transient.Engine)
	return func(e *evaluate.Evaluator, p *stage.Point, r *evaluate.Result) {
		deviation, recovery, peak := 0.0, 0.0, 0.0
		for _, ends := range [2][2]float64{{l.from, l.to}, {l.to, l.from}} {
			at := *p
			at.Load = stage.Load{Current: ends[0]}
			e.Eval(&at, &result)
			o, followed := l.follow(run, e, result.Status, ends[1]-ends[0])
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

// follow runs one step from the operating point just evaluated.
func (l *loadStep) follow(run *transient.Engine, e *evaluate.Evaluator, s evaluate.Status, change float64) (transient.Outcome, bool) {
	var none transient.Outcome
	var plant loop.Plant
	if !plant.Bind(e, s) {
		return none, false
	}
	period := plant.Circuit.Period
	after := leastFollow
	if parts.Known(l.recovery) {
		after = math.Min(mostFollow, math.Max(after, 1.5*l.recovery/period))
	}
	err := run.Reset(&transient.Setup{
		Plant: plant, Bounds: transient.DefaultBounds(&e.Stage().Controller, &plant), Duration: (stepAfter + after) * period, Band: l.band, Saturation: parts.Unknown,
		Events: []transient.Event{{Kind: transient.LoadStep, At: stepAfter * period, Change: change, Slew: l.slew}},
	})
	if err != nil {
		return none, false
	}
	for run.Advance(int(mostFollow)) {
	}
	result := run.Result()
	if !result.Status.OK() || len(result.Outcomes) == 0 {
		return none, false
	}
	return result.Outcomes[len(result.Outcomes)-1], true
}
