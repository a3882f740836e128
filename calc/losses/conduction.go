package losses

// Resistive returns the loss [W] of a resistance [ohm] with a mean square current
// [A²] in it.
//
//	P = R I²rms
//
// Exact. High-side conduction is Rhs(Tj) D (I² + ΔI²/12) for a straight current.
// Checked by power-stage cases ps-lo-02, 03, 05, 06, 07, 08, 11.
func Resistive(r, meanSquare float64) float64 { return r * meanSquare }

// DiodeConduction returns the loss [W] of a threshold and a slope resistance.
//
//	P = Vt Imean + Rd I²rms
//
// With the diode's own mean and RMS current; the share (1 − D) is in them and is
// not applied again. Exact. Checked by power-stage cases ps-lo-02, 04, 09.
func DiodeConduction(threshold, slope, mean, meanSquare float64) float64 {
	return threshold*mean + slope*meanSquare
}

// DeadTimeShare returns the mean square current [A²] that the low-side channel
// does not carry because its body diode does.
//
//	f Σ td i²
//
//	f [Hz], td [s] dead time of each edge, on, off [A] inductor current at the edges
//
// The circuit is solved without dead time; this share is taken off the low side's
// conduction and the body diode's loss is put in its place.
func DeadTimeShare(f, td, on, off float64) float64 { return f * td * (on*on + off*off) }
