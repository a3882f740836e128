package substitution

import (
	"math"

	"railproof/calc/quantity"
	"railproof/calc/rules"
	"railproof/calc/stage"
)

// LimitsOf returns the limits that a requirement sets on quantities.
func LimitsOf(r *stage.Requirement) []rules.Limit {
	none := math.NaN()
	t := &r.Targets
	list := []rules.Limit{{Quantity: quantity.LoadVoltage, Min: r.Output * (1 - r.OutputTolerance), Max: r.Output * (1 + r.OutputTolerance)}}
	atMost := func(id quantity.ID, most float64) {
		if most > 0 {
			list = append(list, rules.Limit{Quantity: id, Min: none, Max: most})
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
