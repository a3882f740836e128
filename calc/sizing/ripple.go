package sizing

import "math"

// OutputRipple returns the peak-to-peak voltage of one capacitor with series
// resistance under a triangular current: exact.
//
// With d = min(D, 1 − D) and x = ESR C fs:
//
//	x ≤ d/2:             ΔV = ΔI/(8 fs C) + ΔI ESR² C fs/(2 D (1 − D))
//	d/2 < x < (1 − d)/2: ΔV = ΔI (1 − d)/(8 fs C) + ESR ΔI/2 + ΔI ESR² C fs/(2 (1 − d))
//	x ≥ (1 − d)/2:       ΔV = ESR ΔI
//
//	di       [A]   peak-to-peak current
//	duty     [1]   rising fraction of the period
//	fs       [Hz]  its frequency: N times the switching frequency for N phases
//	c, esr   [F], [ohm]
//
// The branches tell how many of the two extremes lie on switching edges.
// Valid in continuous conduction; in discontinuous conduction the ripple is less
// than at the boundary.
//
// Source: derived; identities checked by integration, case ps-sz-20.
// Checked by TestPublishedSizing and, against the exact engine, by
// TestClosedFormsAgainstTheEngine.
func OutputRipple(di, duty, fs, c, esr float64) float64 {
	return di * rippleShape(duty, esr*c*fs) / (fs * c)
}

// rippleShape returns ΔV fs C/ΔI at a relative time constant x = ESR C fs. For a
// given kind of capacitor x does not depend on how many are paralleled, so C for a
// ripple target follows without iteration.
func rippleShape(duty, x float64) float64 {
	d := math.Min(duty, 1-duty)
	switch {
	case x <= d/2:
		return 1.0/8 + x*x/(2*d*(1-d))
	case x < (1-d)/2:
		return (1-d)/8 + x/2 + x*x/(2*(1-d))
	}
	return x
}

// CapacitanceForRipple returns the capacitance at which a triangular current
// causes the ripple dv [V], the kind of capacitor having the time constant
// tau = ESR C [s]; the inverse of OutputRipple. tau = 0 gives the textbook value
//
//	C = ΔI/(8 fs ΔV)
//
// Source: M. H. Rashid, Power Electronics, 4th ed., Example 5.5, for tau = 0.
// Checked by TestPublishedSizing, cases ps-sz-01 and ps-sz-07.
func CapacitanceForRipple(di, duty, fs, dv, tau float64) float64 {
	return di * rippleShape(duty, tau*fs) / (fs * dv)
}

// ESRForRipple returns the greatest series resistance at which a capacitor of
// capacitance c keeps the ripple dv [V]; NaN where even without series resistance
// it does not. The inverse of OutputRipple in its third argument, branch by branch:
//
//	ΔV ≥ that at x = (1 − d)/2: ESR = ΔV/ΔI
//	between: ESR = [−1 + sqrt(1 + 8 (ΔV − ΔV0)/(ΔI g))] (1 − d)/(2 C fs),  g = (1 − d)/(C fs), ΔV0 = ΔI g/8
//	below:   ESR = sqrt(2 D (1 − D) (ΔV/ΔI − 1/(8 fs C)) / (C fs))
//
// Source: as OutputRipple. Checked by TestESRInvertsTheRipple.
func ESRForRipple(di, duty, fs, c, dv float64) float64 {
	d := math.Min(duty, 1-duty)
	y := dv * fs * c / di // as rippleShape
	var x float64
	switch {
	case y < 1.0/8:
		return math.NaN()
	case y <= rippleShape(duty, d/2):
		x = math.Sqrt(2 * d * (1 - d) * (y - 1.0/8))
	case y < (1-d)/2:
		x = (1 - d) / 2 * (math.Sqrt(1+8*(y/(1-d)-1.0/8)) - 1)
	default:
		x = y
	}
	return x / (c * fs)
}
