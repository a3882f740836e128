package losses

// OutputChargeLoss returns the loss [W] of charging and discharging the output
// capacitances of a half bridge, burnt in the channel that turns on hard.
//
//	P = f [E_own(Vin) + Vin Q_partner(Vin) − E_partner(Vin)]
//
//	own [J]     energy in the switch that turns on: burnt in its channel
//	charge [C], energy [J]  of its partner, which is charged from Vin through it
//
// Exact for any non-linear capacitance. For two constant capacitances it is
// (C1 + C2) V² f/2 (Texas Instruments, TPS54291 data sheet SLUS973, eq. 43,
// power-stage case ps-lo-07). A partner with a junction charge in place of a
// switch enters the same way. For a reversed or resting current, which would
// bring charge back, no credit is given.
//
// Derived from the energy drawn from Vin; checked by integration in
// TestOutputChargeLossByIntegration.
func OutputChargeLoss(vin, f, own, charge, energy float64) float64 {
	return f * (own + vin*charge - energy)
}
