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
