package loop

import "math"

// LeadPair is a zero and a pole that give a phase lead around a frequency.
type LeadPair struct {
	Zero float64 // [Hz]
	Pole float64 // [Hz]
}

// PlaceLead returns the zero and the pole whose greatest phase lead is the given
// one and lies at the frequency fc.
//
//	fz = fc sqrt((1-sin a)/(1+sin a)), fp = fc sqrt((1+sin a)/(1-sin a))
//
// Valid for 0 <= lead < 90°. Source: R. W. Erickson, D. Maksimovic, Fundamentals
// of Power Electronics, 2nd ed., 2001, section 9.5 (remembered, unverified).
// Checked by TestReferenceLoop loop-03.
func PlaceLead(fc, leadDeg float64) LeadPair {
	s := math.Sin(radians(leadDeg))
	r := math.Sqrt((1 + s) / (1 - s))
	return LeadPair{fc / r, fc * r}
}

// KFactorTwo returns K of a type II compensator, whose zero lies at fc/K and
// whose pole at K fc:
//
//	K = tan(B/2 + 45°), 0 <= B < 90°
//
// Source: H. D. Venable, "The K factor: a new mathematical tool for stability
// analysis and synthesis", Powercon 10, 1983. Checked by TestReferenceLoop loop-10.
func KFactorTwo(boostDeg float64) float64 { return math.Tan(radians(boostDeg/2 + 45)) }

// KFactorThree returns K of a type III compensator, whose two zeros lie at
// fc/sqrt(K) and whose two poles at sqrt(K) fc:
//
//	K = tan²(B/4 + 45°), 0 <= B < 180°
//
// Source: as KFactorTwo. Checked by TestReferenceLoop loop-11.
func KFactorThree(boostDeg float64) float64 {
	t := math.Tan(radians(boostDeg/4 + 45))
	return t * t
}

// TwoPoleQuality returns the quality factor of a closed loop whose loop gain is
// 1/((s/w0)(1+s/w2)), from its phase margin:
//
//	Q = sqrt(cos PM)/sin PM
//
// Source: R. W. Erickson, D. Maksimovic, Fundamentals of Power Electronics, 2nd
// ed., 2001, section 9.4.2. Checked by TestReferenceLoop loop-05. Two summaries
// in circulation print acos(1/(2Q)) and an arctangent with 2Q for 2 zeta; they
// give 60° and 76.3° at Q = 1 where 51.8° is right.
func TwoPoleQuality(marginDeg float64) float64 {
	return math.Sqrt(math.Cos(radians(marginDeg))) / math.Sin(radians(marginDeg))
}

// ReferenceOvershoot returns the relative overshoot of that closed loop after a
// step of the reference, 0 for Q <= 1/2:
//
//	exp(-π/sqrt(4Q² - 1))
//
// It is not the undershoot after a load step. Source and check as TwoPoleQuality.
func ReferenceOvershoot(quality float64) float64 {
	if !(quality > 0.5) {
		return 0
	}
	return math.Exp(-math.Pi / math.Sqrt(4*quality*quality-1))
}

// MarginForOvershoot returns the phase margin [deg] at which a reference step
// overshoots by the given fraction, 0 < overshoot < 1: the two formulas above,
// inverted.
func MarginForOvershoot(overshoot float64) float64 {
	l := math.Pi / math.Log(overshoot)
	q2 := (1 + l*l) / 4
	// Q² sin² = cos with sin² = 1 - cos²: Q² c² + c - Q² = 0.
	c := (math.Sqrt(1+4*q2*q2) - 1) / (2 * q2)
	return degrees(math.Acos(c))
}

func radians(deg float64) float64 { return deg * math.Pi / 180 }
