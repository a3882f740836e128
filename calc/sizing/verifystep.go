package sizing

import (
	"math"
	"strings"

	"railproof/calc/loop"
	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/stage"
	"railproof/calc/transient"
)

const (
	stepAt       = 2.3   // [1] periods before the load step, between two clocks
	leastPeriods = 120.0 // [1] followed after it
	mostPeriods  = 800.0 // [1]
	// recoveryBand is the half width of the band that counts as recovered, over the
	// output voltage.
	recoveryBand = 0.01 // [1]
)

// VerifyStep follows the load step of a requirement on the draft stage in closed
// loop, cycle by cycle, and adds a check for each limit on it: load applied and
// removed, at both ends of the input, with the least output capacitance, the greatest
// series resistance and either end of the inductance, cold and hot, at the end of
// life.
//
// Where no periodic operation is found to start from, the checks are left out and a
// note says so: what was not followed is no pass.
func (a *Answer) VerifyStep(req *stage.Requirement) {
	for range a.VerifyingStep(req) {
	}
}

// VerifyingStep is VerifyStep for a caller that looks about in between: it yields
// after every step that was followed. Left before its end it adds no checks.
func (a *Answer) VerifyingStep(req *stage.Requirement) func(yield func() bool) {
	return func(yield func() bool) { a.verifyStep(req, yield) }
}

func (a *Answer) verifyStep(req *stage.Requirement, yield func() bool) {
	s := req.Targets.LoadStep
	if !a.Status.OK() || !known(s.Step) || !a.Stage.Compensator.Present {
		return
	}
	var checks []Check
	for _, l := range a.Limits {
		if g, _ := quantity.Of(l.Quantity); g.Group == quantity.Transient {
			checks = append(checks, Check{Limit: l, Worst: math.NaN(), Met: true})
		}
	}
	v := newVerifier(a)
	for _, v.point.Input = range ends(a.Conditions.Input) {
		for _, v.point.AmbientDegC = range ends(a.Conditions.AmbientDegC) {
			for _, large := range [2]bool{true, false} {
				for _, applied := range [2]bool{true, false} {
					v.stepVertex(large)
					o, ok := v.followStep(req, applied)
					if !ok {
						a.Notes = append(a.Notes, Note{Code: "load-step-not-followed", Field: "targets/load_step", Detail: "the load step could not be followed cycle by cycle on the draft stage; post it to /v1/transients"})
						return
					}
					for k := range checks {
						checks[k].take(figureOf(&o, checks[k].Quantity), v.point)
					}
					if !yield() {
						return
					}
				}
			}
		}
	}
	a.Checks = append(a.Checks, checks...)
}

// take adds one figure to a check; NaN, which a recovery has that never happens, is
// not met.
func (c *Check) take(x float64, p stage.Point) {
	if !c.holds(x) || math.IsNaN(c.Worst) && c.Met || c.excess(x) > c.excess(c.Worst) {
		c.Worst, c.Corner = x, p
	}
	c.Met = c.Met && c.holds(x)
}

// figureOf returns the figure of an outcome that a quantity stands for.
func figureOf(o *transient.Outcome, id quantity.ID) float64 {
	switch id {
	case quantity.LoadStepDeviation:
		return math.Max(o.Up, o.Down)
	case quantity.LoadStepRecovery:
		return o.Recovery
	case quantity.LoadStepPeak:
		return o.InductorPeak.Value
	}
	return math.NaN()
}

// stepVertex puts the spreads where a load step is worst, the inductance and the
// period being large or small together.
func (v *verifier) stepVertex(large bool) {
	for i, s := range v.answer.Spreads {
		at := s.Typ
		switch {
		case s.Field == "inductor/inductance_h" && large, strings.HasPrefix(s.Field, "output_capacitors/") && strings.HasSuffix(s.Field, "esr_ohm"):
			at = s.Max
		case s.Field == "inductor/inductance_h", s.Field == "switching_frequency_hz" && large, strings.HasPrefix(s.Field, "output_capacitors/") && strings.HasSuffix(s.Field, "capacitance_f"):
			at = s.Min
		case s.Field == "switching_frequency_hz":
			at = s.Max
		}
		*v.value[i] = at
	}
	v.point.AgeRatio = v.answer.Conditions.AgeRatio.Max
}

// followStep runs one load step between the greatest load and that less the step.
func (v *verifier) followStep(req *stage.Requirement, applied bool) (transient.Outcome, bool) {
	s := req.Targets.LoadStep
	v.point.Load.Current = math.Max(req.LoadCurrent.Min, req.LoadCurrent.Max-s.Step)
	change := req.LoadCurrent.Max - v.point.Load.Current
	if !applied {
		v.point.Load.Current, change = req.LoadCurrent.Max, -change
	}
	v.eval.Eval(&v.point, &v.result)
	if !v.result.Status.OK() {
		return transient.Outcome{}, false
	}
	d := v.eval.Stage()
	plant := loop.Plant{Circuit: *v.eval.Circuit(), Modulator: d.Modulator, Compensator: d.Compensator, Feedback: d.Feedback}
	plant.Operate(v.eval.Solution())
	period := plant.Circuit.Period
	after := leastPeriods
	if known(s.Recovery) {
		after = math.Min(mostPeriods, math.Max(after, 1.5*s.Recovery/period))
	}
	e, err := transient.New(&transient.Setup{
		Plant: plant, Bounds: transient.DefaultBounds(&d.Controller, &plant), Duration: (stepAt + after) * period,
		Band: recoveryBand * req.Output, Saturation: parts.Unknown,
		Events: []transient.Event{{Kind: transient.LoadStep, At: stepAt * period, Change: change, Slew: s.Slew}},
	})
	if err != nil {
		return transient.Outcome{}, false
	}
	for e.Advance(100) {
	}
	r := e.Result()
	if !r.Status.OK() {
		return transient.Outcome{}, false
	}
	return r.Outcomes[len(r.Outcomes)-1], true
}
