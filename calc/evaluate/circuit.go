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

// setCircuit gives every element of the circuit its value at the parts' present
// temperatures, the bias voltages and the present inductance.
func (e *Evaluator) setCircuit(bridge, output, ageRatio, copper float64) {
	s, c := e.stage, &e.circuit
	c.Vin = bridge
	c.Period = 1 / s.SwitchingFrequency
	c.Phases = s.PhaseCount
	leg := &c.Leg
	leg.L = e.inductance[0]
	rhs, _ := s.HighSide.OnResistanceAt(e.degC[losses.HighSide], s.Controller.Drive)
	rw, _ := s.Inductor.DCResistanceAt(e.degC[losses.Inductor])
	leg.HighSide = rhs
	leg.Winding = rw + s.Board.SwitchNodePath*copper
	leg.Rectifier.Blocks = s.Rectifier != stage.Synchronous
	if e.synchronous() {
		rls, _ := s.LowSide.OnResistanceAt(e.degC[losses.LowSide], s.Controller.Drive)
		leg.Rectifier.Threshold, leg.Rectifier.Slope = 0, rls
	} else {
		vt, _ := s.Diode.ThresholdAt(e.degC[losses.Diode])
		leg.Rectifier.Threshold, leg.Rectifier.Slope = vt, s.Diode.Slope
	}
	c.Legs = nil
	if len(s.Phases) > 0 {
		e.setLegs()
	}
	c.Banks = len(s.OutputCapacitors)
	for k := range s.OutputCapacitors {
		c.Bank[k] = bankAt(&s.OutputCapacitors[k], output, e.degC[int(losses.OutputCapacitor)+k], ageRatio)
	}
	for k := range s.InputCapacitors {
		e.inputBank[k] = bankAt(&s.InputCapacitors[k], bridge, e.degC[int(losses.InputCapacitor)+k], ageRatio)
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

func bankAt(c *parts.Capacitor, bias, degC, ageRatio float64) switched.Bank {
	esr, _ := c.ESRAt(degC, ageRatio)
	return switched.Bank{C: c.CapacitanceAt(bias, degC, ageRatio), ESR: esr}
}
