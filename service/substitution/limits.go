package substitution

import (
	"math"

	"railproof/calc/quantity"
	"railproof/calc/stage"
)

// LimitsOf returns the limits that a requirement sets on quantities.
func LimitsOf(r *stage.Requirement) []Limit {
	none := math.NaN()
	t := &r.Targets
	list := []Limit{{quantity.LoadVoltage, r.Output * (1 - r.OutputTolerance), r.Output * (1 + r.OutputTolerance)}}
	atMost := func(id quantity.ID, most float64) {
		if most > 0 {
			list = append(list, Limit{id, none, most})
		}
	}
	atMost(quantity.OutputRippleWithESLPP, t.OutputRipple)
	atMost(quantity.InputRipplePP, t.InputRipple)
	atMost(quantity.BoundaryLoad, t.ContinuousDownTo)
	for _, id := range []quantity.ID{quantity.HighSideJunction, quantity.LowSideJunction, quantity.DiodeJunction} {
		atMost(id, t.JunctionDegC)
	}
	if t.LoadStep.Step > 0 {
		atMost(quantity.LoadStepDeviation, t.LoadStep.Deviation)
		atMost(quantity.LoadStepRecovery, t.LoadStep.Recovery)
	}
	return list
}
