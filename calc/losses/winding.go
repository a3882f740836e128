package losses

// WindingDCLoss returns the winding's loss [W] by the mean current.
//
//	P = DCR I²mean
//
// Checked by power-stage cases ps-lo-02, 06, 09.
func WindingDCLoss(dcr, mean float64) float64 { return dcr * mean * mean }

// WindingACLoss returns the winding's loss [W] by the alternating current.
//
//	P = rac DCR (I²rms − I²mean)
//
//	rac [1] AC over DC resistance at the switching frequency
//
// One ratio for the whole ripple: harmonics above the fundamental, which carry 1.5
// % of a triangle's mean square at duty 0.5, see more resistance than this. With
// WindingDCLoss it replaces DCR I²rms of the circuit.
//
// Derived (Parseval); checked by integration of the waveform in
// TestWindingByIntegration.
func WindingACLoss(dcr, ratio, mean, meanSquare float64) float64 {
	return ratio * dcr * (meanSquare - mean*mean)
}
