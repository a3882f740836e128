package losses

import (
	"railproof/calc/magnetics"
	"railproof/calc/parts"
	"railproof/calc/stage"
	"railproof/calc/switched"
	"railproof/calc/thermal"
)

// Model computes every loss of one stage. It is used in five steps, each as
// seldom as it may be:
//
//	Prepare  once per stage   what only exponents and topology decide
//	Begin    once per point   what the stage's numbers decide
//	Charge   once per bridge voltage   charges that the switches block
//	Freeze   once per circuit solution   currents; after it temperature is the only variable
//	Powers   once per thermal step   power and slope of every part
//	Fill     once at the end   the table of items, at the temperatures of the last Powers
//
// The stage is read at every step, so a caller may change its numbers between
// points. Nothing allocates.
type Model struct {
	st       *stage.Stage
	triangle magnetics.Triangle
	phases   float64
	point    pointRates
	currents currents
	warm     elements
}

// Operation is what losses depend on besides the parts' temperatures.
type Operation struct {
	Bridge      float64                      // [V] at the input capacitors, which the switches block
	Output      float64                      // [V] mean, at the output capacitors
	AgeRatio    float64                      // [1]
	BoardDegC   float64                      // [degC] of the copper paths
	Inductance  float64                      // [H] of one phase over its current swing
	Inductances *[switched.MaxPhases]float64 // [H] of each phase of an unequal circuit; else nil
	PathMean    float64                      // [A] mean current through the input path
	LoadRMS     float64                      // [A] through the output path
	InputBank   [switched.MaxBanks]float64   // [A] RMS of each input bank
	Solution    *switched.Solution
}

// Prepare binds the model to a stage.
func (m *Model) Prepare(s *stage.Stage) {
	m.st = s
	m.phases = float64(max(s.PhaseCount, 1))
	if c := &s.Inductor.Core; c.Present {
		m.triangle = magnetics.PrepareTriangle(c.Alpha, c.Beta)
	}
}

// pointRates holds what depends on the stage's numbers, frequency and voltages
// only.
type pointRates struct {
	f, vin, td   float64 // [Hz], [V], [s]
	ton, toff    float64 // [s]
	outputCharge float64 // [W]
	junction     float64 // [W]
	recovery     float64 // [W]
	gateDrive    float64 // [W] of all phases
	quiescent    float64 // [W]
	rhs, rls     float64 // [ohm] at 25 degC and the drive voltage
}

// Begin computes what does not depend on a voltage. It must be called again when a
// number of the stage has changed.
func (m *Model) Begin() {
	s, p := m.st, &m.point
	p.f, p.td = s.SwitchingFrequency, s.Controller.DeadTime
	p.rhs = s.HighSide.OnResistanceDriven(s.Controller.Drive)
	if s.Rectifier != stage.DiodeRectified {
		p.rls = s.LowSide.OnResistanceDriven(s.Controller.Drive)
	}
	if core := &s.Inductor.Core; core.Present {
		m.triangle.At(core.K, p.f)
	}
}

// OnResistances returns the switches' resistances at 25 °C and the drive voltage
// [ohm], after Begin; that of an absent low side is without meaning.
func (m *Model) OnResistances() (high, low float64) { return m.point.rhs, m.point.rls }

// Charge computes charges and rates at the bridge voltage and output voltage [V]. It
// must be called again when one of them has changed, and after Begin.
func (m *Model) Charge(bridge, output float64) {
	s, p := m.st, &m.point
	hs, c := &s.HighSide, &s.Controller
	p.vin = bridge
	charge := hs.SwitchChargeAt(bridge)
	p.ton = Transition(charge, c.GateOn+hs.InternalGate, c.Drive-hs.Plateau)
	p.toff = Transition(charge, c.GateOff+hs.InternalGate, hs.Plateau)

	_, own := hs.OutputAt(bridge)
	gates := hs.GateCharge
	if s.Rectifier == stage.DiodeRectified {
		q, e := s.Diode.JunctionChargeAt(bridge)
		p.outputCharge = OutputChargeLoss(bridge, p.f, own, 0, 0)
		p.junction = OutputChargeLoss(bridge, p.f, 0, q, e)
		p.recovery = RecoveryLoss(bridge, s.Diode.RecoveryCharge, p.f)
	} else {
		q, e := s.LowSide.OutputAt(bridge)
		p.outputCharge = OutputChargeLoss(bridge, p.f, own, q, e)
		p.junction = 0
		p.recovery = RecoveryLoss(bridge, s.LowSide.RecoveryCharge, p.f)
		gates += s.LowSide.GateCharge
	}
	p.gateDrive = m.phases * GateDriveLoss(gates, driveSource(c, bridge, output), p.f)
	p.quiescent = QuiescentLoss(bridge, c.QuiescentCurrent)
}

// driveSource is the voltage [V] that the gate charge is drawn from.
func driveSource(c *parts.Controller, bridge, output float64) float64 {
	switch c.DriveSupply {
	case parts.DriveFromInput:
		return bridge
	case parts.DriveFromOutput:
		return output
	}
	return c.Drive
}

// elements are the resistances and multipliers of the parts at their temperatures.
type elements struct {
	highSide, lowSide  float64                    // [ohm]
	threshold, leakage float64                    // [V], [A] of the diode
	winding            float64                    // [ohm]
	core               float64                    // [1]
	output, input      [switched.MaxBanks]float64 // [1] of the series resistances
}

// Powers computes the power [W] lost in every part and its slope [W/K] over the
// part's own temperature, at the frozen currents. Entries of absent parts are
// left alone; Part is the index. A capacitor's entry is that of its whole bank.
func (m *Model) Powers(degC, power, slope *thermal.Vector) {
	s, c, w := m.st, &m.currents, &m.warm
	y, dy := s.HighSide.OnMultiplierAt(degC[HighSide])
	w.highSide = m.point.rhs * y
	power[HighSide] = Resistive(w.highSide, c.highSide) + c.highSideFixed
	slope[HighSide] = m.point.rhs * dy * c.highSide

	if s.Rectifier == stage.DiodeRectified {
		m.diodePower(degC[Diode], power, slope)
	} else {
		y, dy = s.LowSide.OnMultiplierAt(degC[LowSide])
		w.lowSide = m.point.rls * y
		power[LowSide] = Resistive(w.lowSide, c.channel) + c.deadLow
		slope[LowSide] = m.point.rls * dy * c.channel
	}

	r, dr := s.Inductor.DCResistanceAt(degC[Inductor])
	w.winding = r
	power[Inductor] = Resistive(r, c.winding)
	slope[Inductor] = dr * c.winding
	if s.Inductor.Core.Present {
		k, dk := s.Inductor.Core.CoreMultiplierAt(degC[Inductor])
		w.core = k
		power[Inductor] += k * c.core
		slope[Inductor] += dk * c.core
	}

	power[Controller], slope[Controller] = c.controller, 0
	for k := range s.OutputCapacitors {
		i := OutputCapacitor + Part(k)
		y, dy = s.OutputCapacitors[k].ESRMultiplierAt(degC[i])
		w.output[k] = y
		power[i], slope[i] = c.output[k]*y, c.output[k]*dy
	}
	for k := range s.InputCapacitors {
		i := InputCapacitor + Part(k)
		y, dy = s.InputCapacitors[k].ESRMultiplierAt(degC[i])
		w.input[k] = y
		power[i], slope[i] = c.input[k]*y, c.input[k]*dy
	}
}

func (m *Model) diodePower(degC float64, power, slope *thermal.Vector) {
	d, c, w := &m.st.Diode, &m.currents, &m.warm
	vt, dvt := d.ThresholdAt(degC)
	ir, dir := d.LeakageAt(degC)
	w.threshold, w.leakage = vt, ir
	blocked := c.duty * m.point.vin
	power[Diode] = DiodeConduction(vt, d.Slope, c.rectifierMean, c.rectifier) + ir*blocked
	slope[Diode] = dvt*c.rectifierMean + dir*blocked
}
