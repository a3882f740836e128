// Package evaluate composes the physics: circuit, parts, losses and temperatures
// of a stage at an operating point, solved together. It is the only place that
// does; corners, rules, substitutions and pictures all call Eval.
package evaluate

import (
	"railproof/calc/losses"
	"railproof/calc/quantity"
	"railproof/calc/switched"
)

// Status tells how an evaluation ended.
type Status uint8

const (
	NotRun Status = iota
	OK
	OverTemperature  // an equilibrium above a rating; every figure is given
	DropOut          // the greatest duty ratio does not reach the output voltage; figures are at that duty
	TooShortOnTime   // the least on-time already delivers more than the load takes
	NoOperatingPoint // the load drags the output to or below zero
	Runaway          // no thermal equilibrium, or none that is stable
	NotConverged     // no answer within the iteration limit
	StatusCount
)

// String returns the status as it stands on the wire.
func (s Status) String() string {
	return [...]string{"not-run", "ok", "over-temperature", "drop-out", "too-short-on-time", "no-operating-point", "runaway", "not-converged"}[s]
}

// OK reports whether the stage works at the point.
func (s Status) OK() bool { return s == OK }

// Figures reports whether the result holds figures.
func (s Status) Figures() bool {
	return s == OK || s == OverTemperature || s == DropOut || s == TooShortOnTime
}

// Result is everything that one evaluation yields.
type Result struct {
	Status     Status
	Mode       switched.Mode
	AtBorder   bool // Mode is that of the solution, and the other one is within BoundaryBand
	Quantities quantity.Vector
	Losses     losses.Sheet
	PartDegC   [losses.PartCount]float64 // [degC] NaN where the stage has no such part
}
