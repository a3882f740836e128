package sizing

import "math"

// CapacitanceForRelease returns the capacitance at which the output overshoots by
// dv when the load drops by step and the high side goes off at once: exact for an
// ideal controller and a constant-current load.
//
//	C = L ΔI² / ((Vo + ΔV)² − Vo²)
//
//	l    [H] inductance of all phases in parallel
//	step [A] change of load; from the worst instant add half the ripple
//	vout, dv [V] before the step, and overshoot
//
// Source: Texas Instruments TPS40200 data sheet SLUS659F, eq. 15; energy balance.
// Other sheets use the difference of squares, cautious by (Ihigh + Ilow)/(Ihigh − Ilow).
// Checked by TestPublishedSizing, cases ps-sz-12 and ps-sz-20.
func CapacitanceForRelease(l, step, vout, dv float64) float64 {
	return l * step * step / ((vout+dv)*(vout+dv) - vout*vout)
}

// CapacitanceForApplication returns the capacitance at which the output undershoots
// by dv when the load rises by step and the controller goes to its greatest duty
// ratio at once.
//
//	C = L ΔI² / (2 ΔV (Dmax Vin − Vo))
//
//	vin, vout [V], l [H] all phases in parallel, step [A], dmax [1]
//
// Source: charge between the load and the rising inductor current; derived, as in
// data sheets that add a safety factor of two. The binding corner is the least input.
// Checked by TestApplicationByIntegration.
func CapacitanceForApplication(vin, vout, l, step, dv, dmax float64) float64 {
	return l * step * step / (2 * dv * (dmax*vin - vout))
}

// CapacitanceForWaiting returns the capacitance that holds a load step within dv
// for the time in which the controller can deliver nothing.
//
//	C = ΔI t / ΔV
//
// Source: Texas Instruments TPS40200 data sheet SLUS659F.
// Checked by TestPublishedSizing, case ps-sz-12.
func CapacitanceForWaiting(step, wait, dv float64) float64 { return step * wait / dv }

// CapacitanceForBandwidth returns the capacitance at which a loop of crossover
// frequency fc holds a load step within dv: the output impedance of the closed loop
// is about that of the capacitor at fc.
//
//	C = ΔI / (2π fc ΔV)
//
// Valid for ESR below 1/(2π fc C) and a phase margin above 45°; the peak of an
// exact linear loop lies at 0.8 to 1.0 of ΔV there.
//
// Source: R. W. Erickson, D. Maksimović, Fundamentals of Power Electronics, ch. 9
// (output impedance of a closed loop); estimate, remembered, unverified in print.
// Checked by the closed loop of the draft stages in TestClosingTheLoop.
func CapacitanceForBandwidth(step, fc, dv float64) float64 {
	return step / (2 * math.Pi * fc * dv)
}

// CapacitanceForHoldUp returns the output capacitance that feeds the load for a
// time without input while the output falls from vout to vto.
//
//	C = Io t / (Vo − Vto)
//
//	vout, vto [V], io [A] constant current, hold [s]
//
// Of a capacitor under bias, C is the mean over the voltages passed.
// Source: charge balance. Checked by TestHoldUpByIntegration.
func CapacitanceForHoldUp(vout, vto, io, hold float64) float64 { return io * hold / (vout - vto) }
