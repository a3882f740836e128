package evaluate

import (
	"railproof/calc/losses"
	"railproof/calc/parts"
	"railproof/calc/stage"
	"railproof/calc/switched"
)

// setLoad folds the output path into the load as the capacitor node sees it. With
// the path R in series with a conductance G and a constant current I0,
//
//	i = (G v + I0)/(1 + G R)
func (e *Evaluator) setLoad(l stage.Load, copper float64) {
	path := e.stage.Board.OutputPath * copper
	share := 1 / (1 + l.Conductance*path)
	e.circuit.Conductance = l.Conductance * share
	e.circuit.Current = l.Current * share
}

// setCircuit gives switches, rectifier and inductor their values at the parts'
// present temperatures and the present inductance.
func (e *Evaluator) setCircuit(bridge, copper float64) {
	s, c := e.stage, &e.circuit
	c.Vin = bridge
	c.Period = 1 / s.SwitchingFrequency
	c.Phases = s.PhaseCount
	leg := &c.Leg
	leg.L = e.inductance[0]
	e.warm = e.model.Warm(&e.degC)
	leg.HighSide = e.warm.HighSide
	leg.Winding = e.warm.Winding + s.Board.SwitchNodePath*copper
	leg.Rectifier.Blocks = s.Rectifier != stage.Synchronous
	if e.synchronous() {
		leg.Rectifier.Threshold, leg.Rectifier.Slope = 0, e.warm.LowSide
	} else {
		leg.Rectifier.Threshold, leg.Rectifier.Slope = e.warm.Threshold, s.Diode.Slope
	}
	c.Legs = nil
	if len(s.Phases) > 0 {
		e.setLegs()
	}
}

// setBanks gives every capacitor bank its value at its present temperature and
// bias, after setCircuit.
func (e *Evaluator) setBanks(bridge, output float64) {
	s, c := e.stage, &e.circuit
	c.Banks = len(s.OutputCapacitors)
	for k := range s.OutputCapacitors {
		left := s.OutputCapacitors[k].CapacitanceMultiplierAt(output, e.degC[int(losses.OutputCapacitor)+k])
		c.Bank[k] = switched.Bank{C: e.aged.output[k] * left, ESR: e.warm.Output[k]}
	}
	for k := range s.InputCapacitors {
		left := s.InputCapacitors[k].CapacitanceMultiplierAt(bridge, e.degC[int(losses.InputCapacitor)+k])
		e.inputBank[k] = switched.Bank{C: e.aged.input[k] * left, ESR: e.warm.Input[k]}
	}
}

// setLegs gives each phase its own elements: the stage's, with the override in
// the stage's place at the same temperature.
func (e *Evaluator) setLegs() {
	s, c := e.stage, &e.circuit
	for k := range s.Phases {
		o, leg := &s.Phases[k], c.Leg
		leg.L = e.inductance[k]
		scale := func(element *float64, override, value float64) {
			if parts.Known(override) {
				*element *= override / value
			}
		}
		scale(&leg.HighSide, o.HighSideOn, s.HighSide.OnResistance)
		if e.synchronous() {
			scale(&leg.Rectifier.Slope, o.LowSideOn, s.LowSide.OnResistance)
		}
		if parts.Known(o.DCResistance) {
			multiplier, _ := parts.CopperMultiplier(e.degC[losses.Inductor])
			leg.Winding += (o.DCResistance - s.Inductor.DCResistance) * multiplier
		}
		e.legs[k] = leg
	}
	c.Legs = &e.legs
}

// agedBanks holds the banks' capacitances [F] at their age, unbiased and at 25 °C:
// constant within a point.
type agedBanks struct {
	output, input [switched.MaxBanks]float64
}

func (e *Evaluator) setAged(ageRatio float64) {
	s := e.stage
	for k := range s.OutputCapacitors {
		e.aged.output[k] = s.OutputCapacitors[k].CapacitanceAged(ageRatio)
	}
	for k := range s.InputCapacitors {
		e.aged.input[k] = s.InputCapacitors[k].CapacitanceAged(ageRatio)
	}
}
