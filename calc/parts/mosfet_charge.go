package parts

import "math"

// SwitchChargeAt returns the gate charge that passes while current and voltage
// change over [C], at a blocking voltage.
//
//	Qsw(V) = (Qgs2 + Qgd) · √(V/Vtest)
//
//	Vtest [V] GateSwitchChargeAt
//
// The gate-drain charge is that of a depletion layer, which grows with the
// square root of the voltage; Qgs2 does not, so below Vtest the result is a
// little low and above it a little high. Valid for V > 0.
//
// Derived from the abrupt one-sided junction; checked by TestSwitchChargeScaling.
func (m *MOSFET) SwitchChargeAt(v float64) float64 {
	return m.GateSwitchCharge * math.Sqrt(v/m.GateSwitchChargeAt)
}

// OutputAt returns the charge [C] in the output capacitance at a drain-source
// voltage and the energy [J] stored in it.
//
//	Q(V) = Qoss · √(V/Vtest),  E(V) = ∫ v dQ = Q V/3
//
// With OutputChargeTable the charge is linear between its points and the origin,
// goes on with the last slope, and E(V) = V Q(V) − ∫ Q dv is exact for that form.
// Valid for V >= 0.
//
// Derived (abrupt junction, C ∝ 1/√V); checked by integration in
// TestOutputEnergyIsIntegralOfCharge.
func (m *MOSFET) OutputAt(v float64) (charge, energy float64) {
	if m.OutputChargeTable.Empty() {
		return squareRootCharge(m.OutputCharge, m.OutputChargeAt, v)
	}
	return m.tableCharge(v)
}

// squareRootCharge is the charge and energy of an abrupt junction that holds q at
// voltage at.
func squareRootCharge(q, at, v float64) (charge, energy float64) {
	charge = q * math.Sqrt(v/at)
	return charge, charge * v / 3
}

func (m *MOSFET) tableCharge(v float64) (charge, energy float64) {
	t := &m.OutputChargeTable
	x0, q0 := t.X[0], t.Y[0]
	if v <= x0 || len(t.X) == 1 {
		if x0 <= 0 {
			return q0, 0
		}
		charge = q0 * v / x0
		return charge, charge * v / 2
	}
	charge = t.At(v)
	return charge, v*charge - q0*max(x0, 0)/2 - t.Integral(x0, v)
}
