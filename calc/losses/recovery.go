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

// recoveryOnset is the valley current, over the ripple, above which the whole
// charge counts. Below, it fades to none at zero current: charge is stored by the
// forward current just before turn-on, and a step there would leave a stage at
// the border of conduction without any thermal equilibrium. The share is
// judgement; what it hides is a loss at loads within a hundredth of the border.
const recoveryOnset = 0.01 // [1]

// RecoveryShare returns how much of the charge is there to be recovered at a
// turn-on current, in a waveform of the given peak-to-peak ripple [A].
func RecoveryShare(turnOn, ripple float64) float64 {
	if !(turnOn > 0) {
		return 0
	}
	return min(1, turnOn/(recoveryOnset*ripple))
}
