package magnetics

import "math"

// Exponent returns the local exponent between two points of a loss curve: α from
// two frequencies at equal flux density, β from two flux densities at equal
// frequency.
//
//	ln(p2/p1)/ln(x2/x1)
//
// Exponents drift along the curve (1.52 to 1.65 from 0.5 to 1 MHz for one power
// ferrite): take points around the operating one.
func Exponent(x1, p1, x2, p2 float64) float64 { return math.Log(p2/p1) / math.Log(x2/x1) }

// Through returns the coefficients whose sine loss at frequency f [Hz] and
// amplitude b [T] is p [W/m3].
func Through(f, b, p, alpha, beta float64) Steinmetz {
	return Steinmetz{p / (math.Pow(f, alpha) * math.Pow(b, beta)), alpha, beta}
}

// Units are those in which a coefficient k was printed, each in SI.
type Units struct {
	Density   float64 // [W/m3] 1e3 for kW/m3, mW/cm3
	Frequency float64 // [Hz] 1e3 for kHz
	Flux      float64 // [T] 1e-3 for mT, 1e-4 for gauss; half of it if the print takes peak to peak
}

// Convert returns coefficients in SI from a k printed in other units.
//
//	k = k' · p0 · f0^(−α) · B0^(−β)
func (u Units) Convert(k, alpha, beta float64) Steinmetz {
	return Steinmetz{k * u.Density * math.Pow(u.Frequency, -alpha) * math.Pow(u.Flux, -beta), alpha, beta}
}
