package losses

// GateDriveLoss returns the loss [W] of charging gates from a supply, burnt in
// driver and gate resistors.
//
//	P = Qg V f
//
//	V [V] what the charge is drawn from: the drive voltage of a supply of its own,
//	      or the input or output voltage behind a linear regulator
//
// Source: Texas Instruments, TPS54360 data sheet SLVSBB4C, eq. 52 (from the
// input, power-stage case ps-lo-03); Analog Devices, ADP2102 data sheet Rev. B,
// p. 21 (ps-lo-06), ps-lo-11.
func GateDriveLoss(charge, v, f float64) float64 { return charge * v * f }
