package parts

import "railproof/calc/numeric"

// CapacitorKind tells the dielectric, which decides the life model and the
// rules that apply.
type CapacitorKind uint8

const (
	CapacitorUnspecified CapacitorKind = iota
	CeramicClass1
	CeramicClass2
	AluminiumElectrolytic
	AluminiumPolymer
	TantalumSolid
	TantalumPolymer
	Film
)

// Capacitor is one bank: Count equal pieces in parallel. Every value is of one
// piece.
type Capacitor struct {
	Capacitance       float64 // [F]
	Count             int
	ESR               float64       // [ohm] at the switching frequency, 25 degC
	ESL               float64       // [H]
	CapacitanceAtBias numeric.Table // direct voltage [V] -> multiplier [1], small-signal
	CapacitanceTemp   numeric.Table // [degC] -> multiplier [1]
	ESRTemp           numeric.Table // [degC] -> multiplier [1]
	CapacitanceAgeing numeric.Table // age ratio [1] -> multiplier [1]
	ESRAgeing         numeric.Table // age ratio [1] -> multiplier [1]
	Kind              CapacitorKind
	Rating            CapacitorRating
	Life              CapacitorLife
	Thermal           Thermal
	Assumed           bool
	PartNumber        string
}

// CapacitorRating holds the limits of the data sheet, per piece.
type CapacitorRating struct {
	Voltage         float64 // [V]
	RippleCurrent   float64 // [A] RMS
	TemperatureDegC float64 // [degC]
}

// CapacitorLife holds what an electrolytic capacitor's endurance statement says.
type CapacitorLife struct {
	Rated           float64 // [s] endurance at the rated temperature and ripple
	RatedRise       float64 // [K] core temperature rise at the rated ripple current
	FrequencyFactor float64 // [1] ripple-current multiplier at the switching frequency
}
