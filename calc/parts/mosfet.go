package parts

import "railproof/calc/numeric"

// MOSFET is one switch of the half bridge.
type MOSFET struct {
	OnResistance       float64       // [ohm] at 25 degC and the controller's drive voltage
	OnResistanceTemp   numeric.Table // junction [degC] -> multiplier [1]
	OnResistanceDrive  numeric.Table // gate drive [V] -> multiplier [1]
	GateCharge         float64       // [C] total, at the drive voltage
	GateSwitchCharge   float64       // [C] Qgs2 + Qgd, at GateSwitchChargeAt
	GateSwitchChargeAt float64       // [V]
	Plateau            float64       // [V] gate plateau voltage
	InternalGate       float64       // [ohm] internal gate resistance
	OutputCharge       float64       // [C] Qoss at OutputChargeAt
	OutputChargeAt     float64       // [V]
	OutputChargeTable  numeric.Table // drain-source [V] -> charge [C]; empty: square-root scaling
	RecoveryCharge     float64       // [C] Qrr of the body diode
	BodyDiode          float64       // [V] forward drop during dead time
	Rating             MOSFETRating
	Thermal            Thermal
	Assumed            bool // a placeholder that sizing proposed
	PartNumber         string
}

// MOSFETRating holds absolute maximum ratings.
type MOSFETRating struct {
	DrainSource  float64 // [V]
	GateSource   float64 // [V]
	DrainCurrent float64 // [A]
	JunctionDegC float64 // [degC]
}

// Thermal is a part's path to ambient.
type Thermal struct {
	JunctionToAmbient float64 // [K/W]
}
