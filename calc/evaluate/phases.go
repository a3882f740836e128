package evaluate

import (
	"railproof/calc/thermal"
)

// phaseSteps bounds the Newton steps to one phase's temperatures.
const phaseSteps = 40

// settlePhases finds the temperatures of each unequal phase's own parts, on the
// currents of the settled circuit, and keeps each part's hottest. It reports
// false if a phase has no equilibrium.
//
// The circuit itself was solved with every phase at the mean temperature; what a
// phase's own temperature would shift between the phases is of second order and
// towards equal sharing, as the hotter path is the more resistive.
func (e *Evaluator) settlePhases(o *operating) bool {
	mean := e.degC
	defer func() {
		e.degC = mean
		e.model.Freeze(&e.operation)
		e.model.Warm(&e.degC)
		e.model.Powers(&e.power, &e.slope)
	}()
	for k := range e.stage.Phases {
		e.degC = mean
		e.model.FreezePhase(&e.operation, k)
		if !e.settlePhase(o) {
			return false
		}
		for i := range e.hottest {
			e.hottest[i] = max(e.hottest[i], e.degC[i])
		}
	}
	return true
}

func (e *Evaluator) settlePhase(o *operating) bool {
	for range phaseSteps {
		e.model.Warm(&e.degC)
		e.model.Powers(&e.power, &e.slope)
		change, state := e.network.Step(o.point.AmbientDegC, &e.power, &e.slope, &e.degC)
		if state == thermal.Runaway {
			return false
		}
		if state == thermal.Stepped && change <= temperatureTolerance {
			ratio, _ := e.network.Feedback(&e.slope)
			return ratio < 1
		}
	}
	return false
}
