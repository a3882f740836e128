package sizing

import (
	"railproof/calc/numeric"
	"railproof/calc/parts"
)

// What sizing takes for granted about parts that are not chosen yet. Each stands
// in the draft stage as a value with a tolerance, so that the corners of the draft
// are those it was sized for.
const (
	inductanceTol   = 0.20 // [1] power inductors are sold at 20 or 30 %
	capacitanceTol  = 0.20 // [1] of every kind of capacitor in use here
	seriesTol       = 0.50 // [1] series resistance, which data sheets give as a typical value
	frequencyTol    = 0.08 // [1] of an oscillator over temperature
	onResistanceTol = 0.30 // [1] greatest over typical
	windingTol      = 0.10 // [1] greatest over typical
	thresholdTol    = 0.10 // [1] of a diode's drop
	chargeTol       = 0.30 // [1] of gate, output and recovery charge
	deadTimeTol     = 0.25 // [1]
)

const (
	// modelMargin covers what the closed forms leave out: the curvature of the
	// current by resistances and the output ripple inside the period. Measured
	// against the exact engine by TestClosedFormsAgainstTheEngine.
	modelMargin = 1.01 // [1]
	// saturationMargin is kept between the greatest current of the inductor and
	// the current at which its inductance has fallen by a fifth.
	saturationMargin = 1.3 // [1]
	// voltageMargin is kept over the greatest input for ringing and derating.
	voltageMargin = 1.25 // [1]
	// currentMargin is kept between a stress and the rated current.
	currentMargin = 1.25 // [1]
	// hotDegC is the junction temperature that drops are budgeted for when no
	// target is given.
	hotDegC = 125.0 // [degC]
	// crossoverRatio is the crossover frequency over the switching frequency; usual
	// practice is a tenth, never above a fifth.
	crossoverRatio = 0.1 // [1]
	// selfHeating is how much warmer than the ambient a capacitor may get.
	selfHeating = 20.0 // [K]
	// mostPieces is how many pieces of the chosen kind are put in parallel before a
	// second bank of larger pieces takes the load step and the hold-up.
	mostPieces = 12
)

// accuracy is one grade of reference and divider.
type accuracy struct {
	reference float64 // [1] tolerance of the reference
	resistor  float64 // [1] tolerance of each divider resistor
}

// grades are tried from the cheapest on, until the output tolerance is kept.
var grades = [...]accuracy{{0.01, 0.01}, {0.01, 0.005}, {0.01, 0.001}, {0.005, 0.001}, {0.0025, 0.0005}}

// saturation is the inductance of the draft's inductors over the current, relative
// to the saturation rating: a powder core that has lost a fifth at its rating.
var saturation = [...][2]float64{{0, 1}, {0.5, 0.96}, {1, 0.8}, {1.5, 0.6}, {2.5, 0.35}}

// onResistanceTemp is the usual rise of a low-voltage switch, 1 + 0.0045/K.
var onResistanceTemp = [...][2]float64{{-55, 0.7}, {25, 1}, {125, 1.45}, {175, 1.75}}

// Source of onResistanceTemp's slope: Linear Technology, LTC3855 data sheet, p. 22,
// 0.005/K for low-voltage parts.

// table returns the pairs as a table.
func table(pairs [][2]float64, scale float64) (t numeric.Table) {
	for _, p := range pairs {
		t.X = append(t.X, p[0]*scale)
		t.Y = append(t.Y, p[1])
	}
	return t
}

// known reports whether a target was asked for: given and above zero.
func known(x float64) bool { return parts.Known(x) && x > 0 }
