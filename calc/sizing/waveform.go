package sizing

import "math"

// TriangleRMS returns the RMS of a current of mean i and triangular ripple di, as
// in an inductor in continuous conduction.
//
//	Irms = sqrt(I² + ΔI²/12)
//
//	i, di [A] mean and peak-to-peak
//
// Source: R. W. Erickson, D. Maksimović, Fundamentals of Power Electronics,
// appendix A. Checked by TestPublishedSizing, cases ps-wm-01, ps-sz-03, 06 to 10.
func TriangleRMS(i, di float64) float64 { return math.Sqrt(i*i + di*di/12) }

// TrapezoidRMS returns the RMS of a current that ramps from i1 to i2 during the
// fraction duty of the period and is zero otherwise: a switch in continuous
// conduction.
//
//	Irms = sqrt(D (I1² + I1 I2 + I2²)/3)
//
// Equal to sqrt(D (I² + ΔI²/12)) for I1, I2 = I ∓ ΔI/2.
//
// Source: R. W. Erickson, D. Maksimović, Fundamentals of Power Electronics,
// appendix A. Checked by TestPublishedSizing, case ps-wm-01.
func TrapezoidRMS(i1, i2, duty float64) float64 {
	return math.Sqrt(duty * (i1*i1 + i1*i2 + i2*i2) / 3)
}

// InterleavedRipple returns the peak-to-peak sum of the inductor currents of
// phases equal phases, over Vin/(L fs).
//
//	ΔIsum L fs/Vin = N (D − m/N)((m + 1)/N − D),  m = floor(N D)
//
// It is the ripple that the output capacitors see, at N times the frequency; the
// ripple of each phase is not reduced. Zero at D = m/N, where unequal phases leave
// what they differ by.
//
// Source: Texas Instruments SLUU195, eq. 4 and 5 (a product over phases with the
// same values); closed form derived.
// Checked by TestPublishedSizing, cases ps-wm-02 and ps-wm-03, and against summed
// waveforms by TestInterleavedForms.
func InterleavedRipple(phases int, duty float64) float64 {
	n := float64(phases)
	m := math.Floor(n * duty)
	return n * (duty - m/n) * ((m+1)/n - duty)
}
