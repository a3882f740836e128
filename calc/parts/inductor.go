package parts

import "railproof/calc/numeric"

// Inductor is the energy store of one phase.
type Inductor struct {
	Inductance          float64       // [H] incremental, at zero current
	InductanceAtCurrent numeric.Table // direct current [A] -> multiplier [1]
	DCResistance        float64       // [ohm] at 25 degC
	ACResistanceRatio   float64       // [1] AC over DC resistance at the switching frequency
	Core                Core
	Rating              InductorRating
	Thermal             Thermal
	Assumed             bool
	PartNumber          string
}

// Core describes the core loss of an inductor by Steinmetz coefficients for a
// sine of flux density amplitude B: p = K f^Alpha B^Beta.
type Core struct {
	Present  bool
	K        float64       // [W/m3 at 1 Hz, 1 T]
	Alpha    float64       // [1]
	Beta     float64       // [1]
	Turns    float64       // [1]
	Area     float64       // [m2] effective
	Volume   float64       // [m3] effective
	Temp     numeric.Table // core [degC] -> multiplier [1]
	BandLow  float64       // [1] least factor on the computed loss
	BandHigh float64       // [1] greatest factor
}

// InductorRating holds the limits of the data sheet.
type InductorRating struct {
	Saturation  float64 // [A] peak
	Heating     float64 // [A] RMS
	WindingDegC float64 // [degC]
}
