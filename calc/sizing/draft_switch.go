package sizing

import (
	"math"

	"railproof/calc/parts"
)

// Voltage ratings in which switches and diodes are sold.
var (
	switchRatings = [...]float64{25, 30, 40, 60, 80, 100, 150, 200, 250, 300, 500, 600, 650, 800, 900, 1200, 1700} // [V]
	diodeRatings  = [...]float64{20, 30, 40, 60, 80, 100, 150, 200, 300, 400, 600, 1200, 1700}                     // [V]
)

// ratingAtLeast returns the first rating that is not below v, NaN if there is none.
func ratingAtLeast(ratings []float64, v float64) float64 {
	for _, r := range ratings {
		if r >= v {
			return r
		}
	}
	return math.NaN()
}

// What the silicon of a placeholder switch can do: products of on-resistance and
// charge at a 40 V rating and 5 V of gate drive. They are middling values of
// trench switches and grow with the rating to the power of 1.2.
const (
	gateProduct     = 1.1e-10 // [ohm C] on-resistance times total gate charge
	switchShare     = 0.27    // [1] Qgs2 + Qgd over the total gate charge
	outputProduct   = 1.3e-10 // [ohm C] on-resistance times output charge at half the rating
	recoveryProduct = 1.6e-10 // [ohm C] on-resistance times recovery charge
	productVoltage  = 40.0    // [V] rating at which the products hold
	productExponent = 1.2     // [1]
	leastOnOhm      = 2e-4    // [ohm] one package's leads and bond
)

// silicon returns the factor on the products at a voltage rating.
func silicon(rating float64) float64 {
	return math.Pow(max(rating, 25)/productVoltage, productExponent)
}

// switchPlaceholder returns a switch of a voltage rating and on-resistance.
//
//	Qg = k/Ron, and so on: a larger die has less resistance and more charge
func switchPlaceholder(rating, onOhm, mean, junction float64) parts.MOSFET {
	k := silicon(rating)
	gate := neat(gateProduct * k / onOhm)
	return parts.MOSFET{
		OnResistance:     onOhm,
		OnResistanceTemp: table(onResistanceTemp[:], 1),
		GateCharge:       gate,
		GateSwitchCharge: neat(switchShare * gate), GateSwitchChargeAt: rating / 2,
		Plateau: plateauFor(rating), InternalGate: 1.2,
		OutputCharge: neat(outputProduct * k / onOhm), OutputChargeAt: rating / 2,
		RecoveryCharge: neat(recoveryProduct * k / onOhm),
		BodyDiode:      0.85,
		Rating: parts.MOSFETRating{
			DrainSource: rating, GateSource: 4 * driveFor(rating), DrainCurrent: roundUp(max(4*mean, 1)), JunctionDegC: junctionRating(junction),
		},
		Assumed: true,
	}
}

// driveFor returns the gate drive voltage: logic-level parts up to 60 V.
func driveFor(rating float64) float64 {
	if rating <= 60 {
		return 5
	}
	return 10
}

// plateauFor returns the plateau voltage that belongs to the drive.
func plateauFor(rating float64) float64 {
	if rating <= 60 {
		return 2.7
	}
	return 4.5
}

// diodePlaceholder returns a diode of a voltage rating and a rated current: a
// Schottky diode up to 200 V, a fast junction diode above.
func diodePlaceholder(rating, rated, junction float64) parts.Diode {
	d := parts.Diode{
		Threshold: 0.30 + 0.003*rating, Slope: neat(0.12 / rated), ThresholdTemp: -1.2e-3,
		JunctionCharge: neat(1.1e-9 * rated * math.Sqrt(rating/productVoltage)), JunctionAt: rating / 2,
		Leakage: table([][2]float64{{25, 2.5e-6 * rated}, {75, 5e-5 * rated}, {125, 1e-3 * rated}}, 1),
		Rating:  parts.DiodeRating{Reverse: rating, Forward: rated, JunctionDegC: junctionRating(junction)},
		Assumed: true,
	}
	if rating > 200 {
		d.Threshold, d.ThresholdTemp = 0.9, -1.8e-3
		d.RecoveryCharge = 1.5e-8 * rated
		d.Leakage = table([][2]float64{{25, 1e-7 * rated}, {75, 3e-6 * rated}, {125, 5e-5 * rated}}, 1)
	}
	return d
}

// junctionRating returns a junction rating above the limit that is designed for.
func junctionRating(limit float64) float64 {
	return min(500, max(150, 25*math.Ceil((limit+15)/25)))
}

// roundUp returns x to two digits, not below x, so that a placeholder's rating
// reads like a rating.
func roundUp(x float64) float64 {
	e := math.Pow(10, math.Floor(math.Log10(x))-1)
	return math.Ceil(x/e*(1-1e-9)) * e
}
