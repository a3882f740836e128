package losses

import (
	"railproof/calc/magnetics"
	"railproof/calc/parts"
	"railproof/calc/stage"
	"railproof/calc/switched"
)

// currents holds the mean squares and temperature-independent powers of a circuit
// solution. Those of a phase are the mean over the phases, weighted with the
// phase's own resistance over the stage's where a phase is overridden, so that
// each times the number of phases is exact.
type currents struct {
	duty          float64                    // [1]
	highSide      float64                    // [A2]
	rectifier     float64                    // [A2] as in the circuit
	channel       float64                    // [A2] of the low side, less the dead times
	rectifierMean float64                    // [A]
	inductorDC    float64                    // [A2]
	inductorAC    float64                    // [A2]
	inductor      float64                    // [A2] unweighted, through switch-node copper
	winding       float64                    // [A2] mean square with the AC ratio
	overlap       float64                    // [W]
	recovery      float64                    // [W]
	charge        float64                    // [W] output charge
	junction      float64                    // [W]
	deadLow       float64                    // [W]
	deadHigh      float64                    // [W]
	highSideFixed float64                    // [W]
	gateDrive     float64                    // [W]
	controller    float64                    // [W]
	core          float64                    // [W] where the temperature multiplier is 1
	density       float64                    // [W/m3] same
	swing         float64                    // [T] peak to peak
	board         float64                    // [1] copper multiplier
	output, input [switched.MaxBanks]float64 // [A2] of each bank
}

// reset clears what the phases add to.
func (c *currents) reset(duty float64) {
	c.duty = duty
	c.highSide, c.rectifier, c.channel, c.rectifierMean = 0, 0, 0, 0
	c.inductorDC, c.inductorAC, c.inductor = 0, 0, 0
	c.overlap, c.recovery, c.deadLow, c.deadHigh = 0, 0, 0, 0
	c.core, c.density, c.swing = 0, 0, 0
}

// Freeze takes a circuit solution; call Charge before. Afterwards the losses
// depend on the parts' temperatures only. Those of unequal phases are the mean.
func (m *Model) Freeze(op *Operation) {
	m.currents.reset(op.Solution.Duty)
	if op.Inductances == nil {
		m.addLeg(&op.Solution.Leg, op.Inductance, nil, 1)
	} else {
		for k := range m.st.PhaseCount {
			m.addPhase(op, k, 1/m.phases)
		}
	}
	m.freezeShared(op)
}

// FreezePhase is Freeze with the currents of phase k alone, for the temperatures
// that this phase's own parts reach.
func (m *Model) FreezePhase(op *Operation, k int) {
	m.currents.reset(op.Solution.Duty)
	m.addPhase(op, k, 1)
	m.freezeShared(op)
}

// addPhase adds phase k of an unequal circuit, with its override if it has one.
func (m *Model) addPhase(op *Operation, k int, weight float64) {
	var override *stage.PhaseOverride
	if k < len(m.st.Phases) {
		override = &m.st.Phases[k]
	}
	m.addLeg(&op.Solution.Legs[k], op.Inductances[k], override, weight)
}

// freezeShared completes what all phases share.
func (m *Model) freezeShared(op *Operation) {
	s, sol, p, c := m.st, op.Solution, &m.point, &m.currents
	if sol.Duty > 0 && sol.Duty < 1 {
		c.charge, c.junction, c.gateDrive = p.outputCharge, p.junction, p.gateDrive
	} else { // the switches rest
		c.charge, c.junction, c.gateDrive = 0, 0, 0
		c.overlap, c.recovery, c.deadLow, c.deadHigh = 0, 0, 0, 0
	}
	c.highSideFixed = c.overlap + c.charge + c.junction + c.recovery + c.deadHigh
	c.winding = c.inductorDC + s.Inductor.ACResistanceRatio*c.inductorAC
	c.controller = c.gateDrive + p.quiescent + s.Controller.AuxiliaryPower
	c.board, _ = parts.CopperMultiplier(op.BoardDegC)
	for k := range s.OutputCapacitors {
		c.output[k] = sol.BankRMS[k] * sol.BankRMS[k]
	}
	for k := range s.InputCapacitors {
		c.input[k] = op.InputBank[k] * op.InputBank[k]
	}
}

// addLeg adds one phase with a weight.
func (m *Model) addLeg(leg *switched.LegSolution, inductance float64, o *stage.PhaseOverride, weight float64) {
	s, p, c := m.st, &m.point, &m.currents
	hs, ls, dcr := 1.0, 1.0, 1.0
	if o != nil {
		hs, ls, dcr = ratio(o.HighSideOn, s.HighSide.OnResistance), ratio(o.LowSideOn, s.LowSide.OnResistance), ratio(o.DCResistance, s.Inductor.DCResistance)
	}
	mean2, rms2 := leg.Inductor.Mean*leg.Inductor.Mean, leg.Inductor.RMS*leg.Inductor.RMS
	c.highSide += weight * hs * leg.HighSide.RMS * leg.HighSide.RMS
	rectifier := leg.Rectifier.RMS * leg.Rectifier.RMS
	c.rectifier += weight * ls * rectifier
	c.rectifierMean += weight * leg.Rectifier.Mean
	c.inductorDC += weight * dcr * mean2
	c.inductorAC += weight * dcr * max(0, rms2-mean2) // a rounding below zero at no ripple
	c.inductor += weight * rms2
	c.overlap += weight * OverlapLoss(p.vin, p.f, leg.TurnOn, leg.TurnOff, p.ton, p.toff)
	if leg.Mode == switched.Continuous {
		c.recovery += weight * p.recovery * RecoveryShare(leg.TurnOn, leg.Peak-leg.Valley)
	}
	if s.Rectifier != stage.DiodeRectified {
		c.channel += weight * ls * max(0, rectifier-DeadTimeShare(p.f, p.td, leg.TurnOn, leg.TurnOff))
		m.addDeadTime(leg.TurnOn, weight)
		m.addDeadTime(leg.TurnOff, weight)
	}
	if core := &s.Inductor.Core; core.Present {
		swing := magnetics.FluxSwing(inductance*(leg.Peak-leg.Valley), core.Turns, core.Area)
		fall := 1 - c.duty
		if leg.Mode == switched.Discontinuous {
			fall = leg.Conduct
		}
		density := m.triangle.Density(swing, c.duty, fall)
		c.swing = max(c.swing, swing)
		c.density += weight * density
		c.core += weight * density * core.Volume
	}
}

// addDeadTime gives the dead time of one edge to the body diode that carries it.
func (m *Model) addDeadTime(i, weight float64) {
	p, c := &m.point, &m.currents
	if i >= 0 {
		c.deadLow += weight * DeadTimeLoss(p.f, p.td, m.st.LowSide.BodyDiode, i)
	} else {
		c.deadHigh += weight * DeadTimeLoss(p.f, p.td, m.st.HighSide.BodyDiode, i)
	}
}

// ratio is an override over the stage's value; 1 where nothing is overridden.
func ratio(override, value float64) float64 {
	if !parts.Known(override) || value == 0 {
		return 1
	}
	return override / value
}
