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
	hot, _ := s.HighSide.OnMultiplierAt(e.degC[losses.HighSide])
	rw, _ := s.Inductor.DCResistanceAt(e.degC[losses.Inductor])
	leg.HighSide = e.base.highSide * hot
	leg.Winding = rw + s.Board.SwitchNodePath*copper
	leg.Rectifier.Blocks = s.Rectifier != stage.Synchronous
	if e.synchronous() {
		hot, _ := s.LowSide.OnMultiplierAt(e.degC[losses.LowSide])
		leg.Rectifier.Threshold, leg.Rectifier.Slope = 0, e.base.lowSide*hot
	} else {
		vt, _ := s.Diode.ThresholdAt(e.degC[losses.Diode])
		leg.Rectifier.Threshold, leg.Rectifier.Slope = vt, s.Diode.Slope
	}
	c.Legs = nil
	if len(s.Phases) > 0 {
		e.setLegs()
	}
}

// setBanks gives every capacitor bank its value at its present temperature and
// bias.
func (e *Evaluator) setBanks(bridge, output float64) {
	s, c := e.stage, &e.circuit
	c.Banks = len(s.OutputCapacitors)
	for k := range s.OutputCapacitors {
		c.Bank[k] = e.base.output[k].at(&s.OutputCapacitors[k], output, e.degC[int(losses.OutputCapacitor)+k])
	}
	for k := range s.InputCapacitors {
		e.inputBank[k] = e.base.input[k].at(&s.InputCapacitors[k], bridge, e.degC[int(losses.InputCapacitor)+k])
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

// base holds what drive voltage and age make of the parts: constant within a
// point.
type base struct {
	highSide, lowSide float64 // [ohm] at 25 degC
	output, input     [switched.MaxBanks]baseBank
}

// baseBank is a bank without bias at 25 degC.
type baseBank struct {
	c, esr float64 // [F], [ohm]
}

func (b *baseBank) at(c *parts.Capacitor, bias, degC float64) switched.Bank {
	hot, _ := c.ESRMultiplierAt(degC)
	return switched.Bank{C: b.c * c.CapacitanceMultiplierAt(bias, degC), ESR: b.esr * hot}
}

func (e *Evaluator) setBase(ageRatio float64) {
	s, b := e.stage, &e.base
	b.highSide, b.lowSide = e.model.OnResistances()
	for k := range s.OutputCapacitors {
		c := &s.OutputCapacitors[k]
		b.output[k] = baseBank{c.CapacitanceAged(ageRatio), c.ESRAged(ageRatio)}
	}
	for k := range s.InputCapacitors {
		c := &s.InputCapacitors[k]
		b.input[k] = baseBank{c.CapacitanceAged(ageRatio), c.ESRAged(ageRatio)}
	}
}
