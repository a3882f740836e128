package parts

// ThresholdAt returns the threshold voltage [V] at a junction temperature and its
// slope over temperature [V/K].
//
//	Vt(Tj) = Vt25 + θ (Tj − 25 °C), not below zero
//
//	θ [V/K] ThresholdTemp, usually −1 to −2 mV/K
//
// The drop at current i is Vt + Rd i. Valid within the junction rating; the floor
// at zero keeps the diode from becoming a source far above it.
func (d *Diode) ThresholdAt(junctionDegC float64) (v, slope float64) {
	v = d.Threshold + d.ThresholdTemp*(junctionDegC-ReferenceDegC)
	if v < 0 {
		return 0, 0
	}
	return v, d.ThresholdTemp
}

// JunctionChargeAt returns the charge [C] of the junction capacitance at a
// reverse voltage and the energy [J] stored in it: Q = Qj √(V/Vtest), E = Q V/3.
// Valid for V >= 0. Derived as MOSFET.OutputAt.
func (d *Diode) JunctionChargeAt(v float64) (charge, energy float64) {
	return squareRootCharge(d.JunctionCharge, d.JunctionAt, v)
}
