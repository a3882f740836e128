// Package stage holds the plain data of the design problem: a power stage, the
// operating point or conditions it works at, and the requirement it must meet.
// Everything is SI; Check tells what is physically inconsistent.
package stage

import (
	"railproof/calc/parts"
)

const (
	MaxPhases = 6 // [1]
	MaxBanks  = 6 // [1] capacitor banks on each side
)

// Rectifier tells what carries the inductor current while the high side is off.
type Rectifier uint8

const (
	Synchronous         Rectifier = iota // low-side switch, conducts both ways
	SynchronousEmulated                  // low-side switch that blocks reverse current
	DiodeRectified                       // diode with threshold and slope
)

// Stage is a power stage with its parts, controller and feedback. Parts describe
// one phase; load and capacitors are the total.
type Stage struct {
	Name               string
	Rectifier          Rectifier
	PhaseCount         int
	SwitchingFrequency float64 // [Hz]
	HighSide           parts.MOSFET
	LowSide            parts.MOSFET // synchronous stages
	Diode              parts.Diode  // diode-rectified stages
	Inductor           parts.Inductor
	OutputCapacitors   []parts.Capacitor
	InputCapacitors    []parts.Capacitor
	Controller         parts.Controller
	Modulator          parts.Modulator
	Compensator        parts.Compensator
	Feedback           Feedback
	Board              Board
	Phases             []PhaseOverride // deviations of single phases; empty: equal phases
	ThermalCouplings   []ThermalCoupling
}

// Feedback is the reference and the divider that set the output voltage.
type Feedback struct {
	Present   bool
	Reference float64 // [V]
	Upper     float64 // [ohm] from the output to the feedback node
	Lower     float64 // [ohm] from there to ground
}

// OutputVoltage returns the output voltage at which the divider returns the
// reference [V]: Vref (1 + Rupper/Rlower).
func (f *Feedback) OutputVoltage() float64 { return f.Reference * (1 + f.Upper/f.Lower) }

// Board holds the resistances of copper paths at 25 degC.
type Board struct {
	InputPath      float64 // [ohm] from the source to the input capacitors
	OutputPath     float64 // [ohm] from the output capacitors to the load
	SwitchNodePath float64 // [ohm] of one phase, in series with its inductor
}

// PhaseOverride replaces values of one phase; Unknown leaves the stage's value.
type PhaseOverride struct {
	Inductance   float64 // [H]
	DCResistance float64 // [ohm]
	HighSideOn   float64 // [ohm]
	LowSideOn    float64 // [ohm]
}

// ThermalCoupling is the mutual resistance between two parts: the rise of one per
// watt in the other.
type ThermalCoupling struct {
	A, B       string  // part roles, as in losses: "high_side", "output_capacitors/0"
	Resistance float64 // [K/W]
}

// Load draws a constant current and the current of a resistor.
type Load struct {
	Current     float64 // [A]
	Conductance float64 // [S] 0: no resistor
}

// ControlKind tells what sets the duty ratio.
type ControlKind uint8

const (
	RegulateTo ControlKind = iota // mean output voltage held at Control.Voltage
	ByFeedback                    // mean output voltage set by reference and divider
	FixedDuty                     // duty ratio given
)

// Control sets the duty ratio of an operating point.
type Control struct {
	Kind    ControlKind
	Voltage float64 // [V] for RegulateTo
	Duty    float64 // [1] for FixedDuty
}

// Point is one operating point.
type Point struct {
	Input               float64 // [V] at the source
	SourceResistance    float64 // [ohm] of the source, before the board's input path
	Load                Load
	AmbientDegC         float64 // [degC]
	AgeRatio            float64 // [1] 0 new, 1 end of life
	PartTemperatureDegC float64 // [degC] every part held there; parts.Unknown: electro-thermal equilibrium
	Asked               float64 // [V] output voltage that the output error refers to; 0: what the control asks for
	Control             Control
}

// Range is a condition that is not statistical.
type Range struct {
	Min, Typ, Max float64 // [any]
}

// Conditions are the ranges over which a stage must work.
type Conditions struct {
	Input            Range   // [V]
	SourceResistance float64 // [ohm]
	LoadCurrent      Range   // [A]
	LoadConductance  Range   // [S]
	AmbientDegC      Range   // [degC]
	AgeRatio         Range   // [1]
	Control          Control
}

// Typical returns the point at which every condition has its typical value.
func (c *Conditions) Typical() Point {
	return Point{
		Input: c.Input.Typ, SourceResistance: c.SourceResistance,
		Load:        Load{Current: c.LoadCurrent.Typ, Conductance: c.LoadConductance.Typ},
		AmbientDegC: c.AmbientDegC.Typ, AgeRatio: c.AgeRatio.Typ,
		PartTemperatureDegC: parts.Unknown, Control: c.Control,
	}
}

// Clone returns a copy that shares no slice that a caller may set through Field.
// Tables are shared: nothing writes to them.
func (s *Stage) Clone() *Stage {
	c := *s
	c.OutputCapacitors = append([]parts.Capacitor(nil), s.OutputCapacitors...)
	c.InputCapacitors = append([]parts.Capacitor(nil), s.InputCapacitors...)
	c.Phases = append([]PhaseOverride(nil), s.Phases...)
	c.ThermalCouplings = append([]ThermalCoupling(nil), s.ThermalCouplings...)
	return &c
}
