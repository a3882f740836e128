package thermal

import "math"

// LinearEquilibrium returns the temperature [degC] at which one part settles whose
// loss is linear in temperature, in closed form.
//
//	P = Pc + P25 [1 + a (T − 25 °C)],  T = Tamb + Rth P
//	T = [Tamb + Rth (Pc + P25 (1 − 25 a))]/(1 − Rth P25 a)
//
//	rth  [K/W] junction to ambient
//	pc   [W]   loss that does not depend on temperature
//	p25  [W]   resistive loss with the resistance at 25 °C
//	a    [1/K] slope of the resistance
//
// ok is false for a gain Rth P25 a of one or more: no equilibrium.
//
// Derived; power-stage case ps-th-08.
func LinearEquilibrium(ambientDegC, rth, pc, p25, a float64) (degC float64, ok bool) {
	gain := rth * p25 * a
	if !(gain < 1) {
		return math.Inf(1), false
	}
	return (ambientDegC + rth*(pc+p25*(1-25*a))) / (1 - gain), true
}
