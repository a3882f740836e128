package losses

import (
	"railproof/calc/stage"
	"railproof/calc/thermal"
)

// Fill writes every item, of the operation that was frozen last, at the parts'
// temperatures, which must be those whose
// resistances the circuit was solved with: then the sum of the items is input
// minus output power exactly.
//
// Items of a part that every phase has are those of one phase, counted Count
// times; items of the controller, the board and the capacitor banks are totals,
// counted once.
//
// It returns the part of the sum that the circuit solution or the load already
// contains [W]: power from the source is the circuit's own input plus Total minus
// this.
func (m *Model) Fill(op *Operation, degC *thermal.Vector, sheet *Sheet) (inside float64) {
	s, c := m.st, &m.currents
	n := max(s.PhaseCount, 1)
	sheet.N = 0

	y, _ := s.HighSide.OnMultiplierAt(degC[HighSide])
	perPhase := Resistive(m.point.rhs*y, c.highSide)
	sheet.add(HighSide, Conduction, perPhase, n)
	sheet.add(HighSide, Overlap, c.overlap, n)
	sheet.add(HighSide, OutputCharge, c.charge, n)
	sheet.add(HighSide, Recovery, c.recovery, n)
	if c.deadHigh > 0 {
		sheet.add(HighSide, DeadTime, c.deadHigh, n)
	}
	if s.Rectifier == stage.DiodeRectified {
		sheet.add(HighSide, JunctionCharge, c.junction, n)
		perPhase += m.fillDiode(degC[Diode], sheet, n)
	} else {
		y, _ = s.LowSide.OnMultiplierAt(degC[LowSide])
		rls := m.point.rls * y
		sheet.add(LowSide, Conduction, Resistive(rls, c.channel), n)
		sheet.add(LowSide, DeadTime, c.deadLow, n)
		perPhase += Resistive(rls, c.rectifier)
	}

	dcr, _ := s.Inductor.DCResistanceAt(degC[Inductor])
	sheet.add(Inductor, WindingDC, Resistive(dcr, c.inductorDC), n)
	sheet.add(Inductor, WindingAC, Resistive(dcr, s.Inductor.ACResistanceRatio*c.inductorAC), n)
	perPhase += Resistive(dcr, c.inductorDC+c.inductorAC)
	if core := &s.Inductor.Core; core.Present {
		k, _ := core.CoreMultiplierAt(degC[Inductor])
		item := sheet.add(Inductor, CoreHysteresis, k*c.core, n)
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
		i := OutputCapacitor + Part(k)
		y, _ = s.OutputCapacitors[k].ESRMultiplierAt(degC[i])
		p := c.output[k] * y
		sheet.add(i, SeriesResistance, p, 1)
		inside += p
	}
	for k := range s.InputCapacitors {
		i := InputCapacitor + Part(k)
		y, _ = s.InputCapacitors[k].ESRMultiplierAt(degC[i])
		sheet.add(i, SeriesResistance, c.input[k]*y, 1)
	}
	return inside
}

func (m *Model) fillDiode(degC float64, sheet *Sheet, n int) (inside float64) {
	d, c := &m.st.Diode, &m.currents
	vt, _ := d.ThresholdAt(degC)
	ir, _ := d.LeakageAt(degC)
	inside = DiodeConduction(vt, d.Slope, c.rectifierMean, c.rectifier)
	sheet.add(Diode, Conduction, inside, n)
	sheet.add(Diode, Leakage, LeakageLoss(c.duty, m.point.vin, ir), n)
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

// Core returns the loss density [W/m3] at a core temperature and the peak-to-peak
// flux density [T], the greatest of all phases.
func (m *Model) Core(coreDegC float64) (density, swing float64) {
	if !m.st.Inductor.Core.Present {
		return nan, nan
	}
	k, _ := m.st.Inductor.Core.CoreMultiplierAt(coreDegC)
	return k * m.currents.density, m.currents.swing
}
