// Package parts models the kinds of part a power stage is made of: switch,
// diode, inductor, capacitor, controller. A kind's data stand in the file of its
// name, its behaviour over temperature, bias, current, drive and age in files
// that begin with it.
//
// Numbers are SI; a temperature in degrees Celsius says so in its name. A value
// that the caller did not give is Unknown (NaN) until stage.ApplyDefaults puts
// the documented default in its place; a rating stays Unknown, because an absent
// rating is neither zero nor infinite.
package parts

import "math"

// ReferenceDegC is the temperature at which resistances are given.
const ReferenceDegC = 25.0 // [degC]

// Unknown marks a value that was not given.
var Unknown = math.NaN()

// Known reports whether a value was given.
func Known(x float64) bool { return !math.IsNaN(x) }
