package losses

import (
	"railproof/calc/magnetics"
	"railproof/calc/parts"
	"railproof/calc/stage"
	"railproof/calc/switched"
	"railproof/calc/thermal"
)

// Model computes every loss of one stage. It is used in steps, each as seldom as it
// may be:
//
//	Prepare  once per stage   what only exponents and topology decide
//	Begin    once per point   what the stage's numbers decide
//	Warm     once per temperatures   resistances, for the circuit too
//	Charge   once per bridge voltage   charges that the switches block
//	Freeze   once per circuit solution   currents; after it temperature is the only variable
//	Powers   once per thermal step   power and slope of every part
//	Fill     once at the end   the table of items, at the temperatures of the last Warm
//
// The stage is read at every step, so a caller may change its numbers between
// points. Nothing allocates.
type Model struct {
	st       *stage.Stage
	triangle magnetics.Triangle
	phases   float64
	point    pointRates
	currents currents
	warm     Elements
	slopes   Elements // of them over the part's own temperature [1/K]
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

	// at 25 °C, the drive voltage and the age
	highSide, lowSide float64                    // [ohm]
	output, input     [switched.MaxBanks]float64 // [ohm] of the banks in series
}

// Begin computes what depends neither on a voltage nor on temperature. It must be
// called again when a number of the stage has changed, or the age [1].
func (m *Model) Begin(ageRatio float64) {
	s, p := m.st, &m.point
	p.f, p.td = s.SwitchingFrequency, s.Controller.DeadTime
	p.highSide = s.HighSide.OnResistanceDriven(s.Controller.Drive)
	if s.Rectifier != stage.DiodeRectified {
		p.lowSide = s.LowSide.OnResistanceDriven(s.Controller.Drive)
	}
	for k := range s.OutputCapacitors {
		p.output[k] = s.OutputCapacitors[k].ESRAged(ageRatio)
	}
	for k := range s.InputCapacitors {
		p.input[k] = s.InputCapacitors[k].ESRAged(ageRatio)
	}
	if core := &s.Inductor.Core; core.Present {
		m.triangle.At(core.K, p.f)
	}
}

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

// Elements are what currents through the parts meet at the parts' temperatures.
type Elements struct {
	HighSide, LowSide float64                    // [ohm]
	Threshold         float64                    // [V] of the diode
	Leakage           float64                    // [A] of the diode
	Winding           float64                    // [ohm]
	Core              float64                    // [1] of the core loss
	Output, Input     [switched.MaxBanks]float64 // [ohm] in series with each bank
}

// Warm reads every element at its part's temperature [degC], after Begin. Entries of
// absent parts are left alone. The elements are the model's own.
func (m *Model) Warm(degC *thermal.Vector) *Elements {
	s, p, y, dy := m.st, &m.point, &m.warm, &m.slopes
	hot, rise := s.HighSide.OnMultiplierAt(degC[HighSide])
	y.HighSide, dy.HighSide = p.highSide*hot, p.highSide*rise
	if s.Rectifier == stage.DiodeRectified {
		y.Threshold, dy.Threshold = s.Diode.ThresholdAt(degC[Diode])
		y.Leakage, dy.Leakage = s.Diode.LeakageAt(degC[Diode])
	} else {
		hot, rise = s.LowSide.OnMultiplierAt(degC[LowSide])
		y.LowSide, dy.LowSide = p.lowSide*hot, p.lowSide*rise
	}
	y.Winding, dy.Winding = s.Inductor.DCResistanceAt(degC[Inductor])
	if s.Inductor.Core.Present {
		y.Core, dy.Core = s.Inductor.Core.CoreMultiplierAt(degC[Inductor])
	}
	for k := range s.OutputCapacitors {
		hot, rise = s.OutputCapacitors[k].ESRMultiplierAt(degC[OutputCapacitor+Part(k)])
		y.Output[k], dy.Output[k] = p.output[k]*hot, p.output[k]*rise
	}
	for k := range s.InputCapacitors {
		hot, rise = s.InputCapacitors[k].ESRMultiplierAt(degC[InputCapacitor+Part(k)])
		y.Input[k], dy.Input[k] = p.input[k]*hot, p.input[k]*rise
	}
	return y
}

// Powers computes the power [W] lost in every part and its slope [W/K] over the
// part's own temperature, at the frozen currents and the temperatures of the last
// Warm. Entries of absent parts are left alone; Part is the index. A capacitor's entry
// is that of its whole bank.
func (m *Model) Powers(power, slope *thermal.Vector) {
	s, c, y, dy := m.st, &m.currents, &m.warm, &m.slopes
	power[HighSide] = Resistive(y.HighSide, c.highSide) + c.highSideFixed
	slope[HighSide] = dy.HighSide * c.highSide
	if s.Rectifier == stage.DiodeRectified {
		power[Diode] = DiodeConduction(y.Threshold, s.Diode.Slope, c.rectifierMean, c.rectifier) + LeakageLoss(c.duty, m.point.vin, y.Leakage)
		slope[Diode] = dy.Threshold*c.rectifierMean + LeakageLoss(c.duty, m.point.vin, dy.Leakage)
	} else {
		power[LowSide] = Resistive(y.LowSide, c.channel) + c.deadLow
		slope[LowSide] = dy.LowSide * c.channel
	}
	power[Inductor] = Resistive(y.Winding, c.winding)
	slope[Inductor] = dy.Winding * c.winding
	if s.Inductor.Core.Present {
		power[Inductor] += y.Core * c.core
		slope[Inductor] += dy.Core * c.core
	}
	power[Controller], slope[Controller] = c.controller, 0
	for k := range s.OutputCapacitors {
		i := OutputCapacitor + Part(k)
		power[i], slope[i] = Resistive(y.Output[k], c.output[k]), dy.Output[k]*c.output[k]
	}
	for k := range s.InputCapacitors {
		i := InputCapacitor + Part(k)
		power[i], slope[i] = Resistive(y.Input[k], c.input[k]), dy.Input[k]*c.input[k]
	}
}
