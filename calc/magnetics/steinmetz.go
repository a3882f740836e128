// Package magnetics computes core loss: Steinmetz coefficients, the improved
// generalised Steinmetz equation for the flux of a switched inductor, and the
// coefficients that data-sheet curves imply.
//
// Flux density in a Steinmetz equation is the amplitude, half of peak to peak.
// No form here knows of direct-current bias (100 mT raised the measured loss of
// one power ferrite by 38 %) or of relaxation at small duty ratios; models good
// to 30 % are the honest expectation.
package magnetics

import "math"

// AbsurdDensity is a power density [W/m3] that no core survives: five watts per
// cubic centimetre. Coefficients that lead beyond it are almost always in other
// units, or are k_i typed as k.
const AbsurdDensity = 5e6 // [W/m3]

// Steinmetz holds the coefficients of the loss density for a sine of flux.
type Steinmetz struct {
	K     float64 // [W/m3 at 1 Hz, 1 T]
	Alpha float64 // [1] of frequency
	Beta  float64 // [1] of flux density amplitude
}

// SineDensity returns the loss density [W/m3] for a sine.
//
//	p = k f^α B^β
//
//	f [Hz] frequency, b [T] amplitude (half of peak to peak)
//
// A local fit: valid near the frequency, flux density and temperature of the
// coefficients. Source: C. P. Steinmetz, Trans. AIEE 9, 1892, in its present form.
func (s Steinmetz) SineDensity(f, b float64) float64 {
	return s.K * math.Pow(f, s.Alpha) * math.Pow(b, s.Beta)
}

// KI returns the coefficient of the improved generalised equation.
//
//	ki = k/[(2π)^(α−1) J 2^(β−α)],  J = ∫ |cos θ|^α dθ over 0..2π = 2 √π Γ((α+1)/2)/Γ(α/2+1)
//
// With it the improved equation gives SineDensity for a sine. Valid for α > 0.
//
// Source: K. Venkatachalam, C. R. Sullivan, T. Abdallah, H. Tacca, "Accurate
// prediction of ferrite core loss with nonsinusoidal waveforms using only
// Steinmetz parameters", IEEE COMPEL 2002 (remembered, unverified); the integral
// in closed form is checked by TestCosineIntegral.
func (s Steinmetz) KI() float64 { return s.K * kiOverK(s.Alpha, s.Beta) }

func kiOverK(a, b float64) float64 {
	return 1 / (math.Pow(2*math.Pi, a-1) * cosineIntegral(a) * math.Pow(2, b-a))
}

// cosineIntegral is ∫ |cos θ|^a dθ over a full turn.
func cosineIntegral(a float64) float64 {
	return 2 * math.Sqrt(math.Pi) * math.Gamma((a+1)/2) / math.Gamma(a/2+1)
}

// KIApproximate returns the usual approximation of KI.
//
//	ki = k/[2^(β+1) π^(α−1) (0.2761 + 1.7061/(α + 1.354))]
//
// Within 0.09 % of KI for 1 <= α <= 2 (measured by TestApproximationOfKI).
func (s Steinmetz) KIApproximate() float64 {
	return s.K / (math.Pow(2, s.Beta+1) * math.Pow(math.Pi, s.Alpha-1) * (0.2761 + 1.7061/(s.Alpha+1.354)))
}

// FromKI returns the sine coefficients of a published triple (ki, α, β).
func FromKI(ki, alpha, beta float64) Steinmetz {
	return Steinmetz{ki / kiOverK(alpha, beta), alpha, beta}
}
