package parts

import "railproof/calc/numeric"

// Diode is the rectifier of a diode-rectified stage.
type Diode struct {
	Threshold      float64       // [V] at 25 degC
	Slope          float64       // [ohm]
	ThresholdTemp  float64       // [V/K]
	JunctionCharge float64       // [C] at JunctionChargeAt
	JunctionAt     float64       // [V]
	RecoveryCharge float64       // [C]
	Leakage        numeric.Table // junction [degC] -> reverse current [A], linear in its logarithm
	Rating         DiodeRating
	Thermal        Thermal
	Assumed        bool
	PartNumber     string
}

// DiodeRating holds absolute maximum ratings.
type DiodeRating struct {
	Reverse      float64 // [V]
	Forward      float64 // [A] mean
	JunctionDegC float64 // [degC]
}
