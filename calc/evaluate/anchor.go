package evaluate

import (
	"railproof/calc/stage"
	"railproof/calc/switched"
	"railproof/calc/thermal"
)

// Anchor is what an evaluation came to, told so that it serves as a first guess for
// stages and points nearby: built units about the typical one.
type Anchor struct {
	power      thermal.Vector              // [W] lost in each part
	inductance [switched.MaxPhases]float64 // [1] over the swing, relative to that without current
	drop       float64                     // [1] between source and bridge, relative to the source's voltage
	perVolt    thermal.Vector              // [K/V] of each part, as the bridge voltage rises
}

// anchorStep is the relative step of the input voltage that tells Anchor.perVolt.
const anchorStep = 1e-3 // [1]

// AnchorAt evaluates the stage at a point, into r, and returns what it came to. ok is
// false where the stage does not work there, or its parts are held at a temperature.
func (e *Evaluator) AnchorAt(p *stage.Point, r *Result) (a Anchor, ok bool) {
	var aside, o operating
	beside := *p
	beside.Input *= 1 + anchorStep
	status := e.run(nil, &beside, &aside, r)
	hotter := e.degC
	if e.run(nil, p, &o, r) != OK || o.held {
		return Anchor{}, false
	}
	a.drop = 1 - o.bridge/p.Input
	for _, part := range e.parts {
		a.power[part] = e.power[part]
		if status == OK {
			a.perVolt[part] = (hotter[part] - e.degC[part]) / (aside.bridge - o.bridge)
		}
	}
	for k := range e.stage.PhaseCount {
		a.inductance[k] = e.inductance[k] / e.nominalInductance(k)
	}
	return a, true
}

// EvalNear is Eval with the joint iteration begun at an anchor, which spares it the
// way from cold. The answer depends on stage, point and anchor only, and agrees with
// Eval's within the tolerances of the iteration. Where the stage does not work at the
// point the answer is Eval's: of several equilibria the lowest counts, and that is the
// one found from cold.
func (e *Evaluator) EvalNear(a *Anchor, p *stage.Point, r *Result) {
	var o operating
	if e.run(a, p, &o, r) != OK {
		e.Eval(p, r)
	}
}
