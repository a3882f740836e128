package losses

// Transition returns the time [s] in which current and voltage of a switch change
// over.
//
//	t = Qsw R/V
//
//	Qsw [C]   Qgs2 + Qgd at the blocking voltage
//	R   [ohm] driver plus internal gate resistance of this edge
//	V   [V]   what drives the gate current: Vdr − Vpl at turn-on, Vpl at turn-off
//
// Source: Linear Technology, LTC3855 data sheet 3855f, p. 22, in its equivalent
// form (power-stage case ps-lo-10). Valid for V > 0; NaN otherwise.
func Transition(charge, resistance, voltage float64) float64 {
	if !(voltage > 0) {
		return nan
	}
	return charge * resistance / voltage
}

// OverlapLoss returns the loss [W] of current and voltage overlapping in the high
// side.
//
//	P = Vin f (max(ion, 0) ton + max(ioff, 0) toff)/2
//
//	ion, ioff [A] inductor current at turn-on (valley) and turn-off (peak)
//	ton, toff [s] Transition of either edge
//
// A reversed current turns on softly and has no overlap. Straight-line model:
// common-source inductance and the part of turn-off that the output capacitance
// takes over are missing; good to a factor of two.
//
// Source: Analog Devices, ADP2102 data sheet Rev. B, p. 21 (power-stage case
// ps-lo-06); ps-lo-02, 03, 05, 10, 11.
func OverlapLoss(vin, f, on, off, ton, toff float64) float64 {
	return vin * f * (max(on, 0)*ton + max(off, 0)*toff) / 2
}
