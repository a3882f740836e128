package losses

// RecoveryLoss returns the loss [W] of the rectifier's recovery charge, burnt in
// the high side.
//
//	P = Vin Qrr f
//
// Zero in discontinuous conduction and for a reversed current at turn-on, where
// the rectifier has no charge to recover; the caller decides. A maker's Qrr often
// contains the output charge, which this product counts by itself.
//
// Source: loss tables of STMicroelectronics STD50N03L and IRF7832 data sheets
// (power-stage case ps-lo-11). The bound Vin I trr f of Franco, example 11.20, is
// this with Qrr = I trr (ps-lo-09).
func RecoveryLoss(vin, charge, f float64) float64 { return vin * charge * f }
