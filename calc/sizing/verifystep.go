package sizing

import (
	"math"
	"strings"

	"railproof/calc/quantity"
	"railproof/calc/stage"
	"railproof/calc/transient"
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
	step, asked := transient.DemandOf(req)
	if !a.Status.OK() || !asked || !a.Stage.Compensator.Present {
		return
	}
	var checks []Check
	for _, l := range a.Limits {
		if g, _ := quantity.Of(l.Quantity); g.Group == quantity.Transient {
			checks = append(checks, Check{Limit: l, Worst: math.NaN(), Met: true})
		}
	}
	v, follower := newVerifier(a), transient.Follower{Demand: step}
	for _, v.point.Input = range ends(a.Conditions.Input) {
		for _, v.point.AmbientDegC = range ends(a.Conditions.AmbientDegC) {
			for _, large := range [2]bool{true, false} {
				for _, applied := range [2]bool{true, false} {
					v.stepVertex(large)
					v.point.Load.Current = follower.Start(applied)
					o, ok := follower.Follow(v.eval, &v.point, applied)
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
