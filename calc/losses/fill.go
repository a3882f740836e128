package losses

import "railproof/calc/stage"

// Fill writes every item of the operation that was frozen last, at the temperatures
// of the last Warm, which must be those whose resistances the circuit was solved
// with: then the sum of the items is input minus output power exactly.
//
// Items of a part that every phase has are those of one phase, counted Count
// times; items of the controller, the board and the capacitor banks are totals,
// counted once.
//
// It returns the part of the sum that the circuit solution or the load already
// contains [W]: power from the source is the circuit's own input plus Total minus
// this.
func (m *Model) Fill(op *Operation, sheet *Sheet) (inside float64) {
	s, c, w := m.st, &m.currents, &m.warm
	n := max(s.PhaseCount, 1)
	sheet.N = 0

	perPhase := Resistive(w.HighSide, c.highSide)
	sheet.add(HighSide, Conduction, perPhase, n)
	sheet.add(HighSide, Overlap, c.overlap, n)
	sheet.add(HighSide, OutputCharge, c.charge, n)
	sheet.add(HighSide, Recovery, c.recovery, n)
	if c.deadHigh > 0 {
		sheet.add(HighSide, DeadTime, c.deadHigh, n)
	}
	if s.Rectifier == stage.DiodeRectified {
		sheet.add(HighSide, JunctionCharge, c.junction, n)
		conduction := DiodeConduction(w.Threshold, s.Diode.Slope, c.rectifierMean, c.rectifier)
		sheet.add(Diode, Conduction, conduction, n)
		sheet.add(Diode, Leakage, LeakageLoss(c.duty, m.point.vin, w.Leakage), n)
		perPhase += conduction
	} else {
		sheet.add(LowSide, Conduction, Resistive(w.LowSide, c.channel), n)
		sheet.add(LowSide, DeadTime, c.deadLow, n)
		perPhase += Resistive(w.LowSide, c.rectifier)
	}

	sheet.add(Inductor, WindingDC, Resistive(w.Winding, c.inductorDC), n)
	sheet.add(Inductor, WindingAC, Resistive(w.Winding, s.Inductor.ACResistanceRatio*c.inductorAC), n)
	perPhase += Resistive(w.Winding, c.inductorDC+c.inductorAC)
	if core := &s.Inductor.Core; core.Present {
		item := sheet.add(Inductor, CoreHysteresis, w.Core*c.core, n)
		item.BandLow, item.BandHigh = core.BandLow, core.BandHigh
	}

	sheet.add(Controller, GateDrive, c.gateDrive, 1)
	sheet.add(Controller, Quiescent, m.point.quiescent, 1)
	sheet.add(Controller, Auxiliary, s.Controller.AuxiliaryPower, 1)

	switchNode := m.phases * Resistive(s.Board.SwitchNodePath*c.board, c.inductor)
	outputPath := Resistive(s.Board.OutputPath*c.board, op.LoadRMS*op.LoadRMS)
	sheet.add(Board, InputPath, Resistive(s.Board.InputPath*c.board, op.PathMean*op.PathMean), 1)
	sheet.add(Board, SwitchNodePath, switchNode, 1)
	sheet.add(Board, OutputPath, outputPath, 1)

	inside = m.phases*perPhase + switchNode + outputPath
	for k := range s.OutputCapacitors {
		p := Resistive(w.Output[k], c.output[k])
		sheet.add(OutputCapacitor+Part(k), SeriesResistance, p, 1)
		inside += p
	}
	for k := range s.InputCapacitors {
		sheet.add(InputCapacitor+Part(k), SeriesResistance, Resistive(w.Input[k], c.input[k]), 1)
	}
	return inside
}

// add appends an item with its mechanism's band. Field by field: a literal is
// built beside the array and copied, which takes three times as long.
func (s *Sheet) add(p Part, m Mechanism, power float64, count int) *Item {
	i := &s.Items[s.N]
	s.N++
	i.Part, i.Mechanism, i.Power, i.Count = p, m, power, count
	i.BandLow, i.BandHigh = modelBands[m].Low, modelBands[m].High
	return i
}

// Core returns the loss density [W/m3] and the peak-to-peak flux density [T], the
// greatest of all phases, at the temperatures of the last Warm.
func (m *Model) Core() (density, swing float64) {
	if !m.st.Inductor.Core.Present {
		return nan, nan
	}
	return m.warm.Core * m.currents.density, m.currents.swing
}
