package loop

import (
	"math"

	"railproof/calc/switched"
)

// resting is the averaged model of discontinuous conduction: the mean current of
// one phase is a function of duty ratio, input and output voltage, whose
// derivatives make a current source with conductances. The inductor's own pole,
// near or above the switching frequency, is left out.
//
// Lossless and without threshold this is the usual model,
//
//	Gd(0) = (2V/D)(1-M)/(2-M), wp = (2-M)/((1-M) R C)
//
// Source: R. W. Erickson, D. Maksimovic, Fundamentals of Power Electronics, 2nd
// ed., 2001, chapter 11 (remembered, unverified), with resistances and threshold
// from the exact exponentials at constant output voltage. Checked by
// TestReferenceLoop loop-07.
type resting struct {
	byDuty, byLine, byOutput       float64 // [A] [S] [S] derivatives of the mean inductor current
	onDuty, onLine, onOutput       float64 // [A] [S] [S] of the mean high-side current
	peakDuty, peakLine, peakOutput float64 // [A] [S] [S] of the peak current
}

// differenceStep is the relative step of the central differences below; their
// error, of the order of its square, is below 1e-9.
const differenceStep = 1e-5

func (r *resting) set(p *Plant, leg *switched.Leg) {
	period, d, vin, v := p.Circuit.Period, p.Duty, p.Circuit.Vin, p.Output
	slope := func(h float64, at func(x float64) restingRun) (mean, on, peak float64) {
		hi, lo := at(h), at(-h)
		return (hi.mean - lo.mean) / (2 * h), (hi.on - lo.on) / (2 * h), (hi.peak - lo.peak) / (2 * h)
	}
	r.byDuty, r.onDuty, r.peakDuty = slope(differenceStep*d, func(x float64) restingRun { return restingCurrents(leg, period, d+x, vin, v) })
	r.byLine, r.onLine, r.peakLine = slope(differenceStep*vin, func(x float64) restingRun { return restingCurrents(leg, period, d, vin+x, v) })
	r.byOutput, r.onOutput, r.peakOutput = slope(differenceStep*v, func(x float64) restingRun { return restingCurrents(leg, period, d, vin, v+x) })
}

// restingRun sums up one period's current of a phase that comes to rest.
type restingRun struct {
	mean, on, peak float64 // [A] of the inductor, of the high side, greatest
}

// restingCurrents returns the currents of a phase that starts at rest, rises for
// d T and falls to zero, at constant output voltage:
//
//	Ipk = (Vin-V) t1/L φ1(-R1 t1/L),  q1 = (Vin-V) t1²/L φ2(-R1 t1/L)
//	q2 = L Ipk²/(V+Vth) (x - ln(1+x))/x²,  x = Ipk R2/(V+Vth)
//	I = (q1 + q2)/T,  Ion = q1/T,  φ1(x) = (e^x - 1)/x,  φ2(x) = (e^x - 1 - x)/x²
func restingCurrents(leg *switched.Leg, period, d, vin, v float64) restingRun {
	t1 := d * period
	rise := (vin - v) / leg.L
	a := -(leg.HighSide + leg.Winding) * t1 / leg.L
	peak := rise * t1 * phi1(a)
	q1 := rise * t1 * t1 * phi2(a)
	fall := v + leg.Rectifier.Threshold
	x := peak * (leg.Rectifier.Slope + leg.Winding) / fall
	q2 := leg.L * peak * peak / fall * lagging(x)
	return restingRun{(q1 + q2) / period, q1 / period, peak}
}

func phi1(x float64) float64 {
	if math.Abs(x) < seriesBelow {
		return 1 + x/2*(1+x/3*(1+x/4*(1+x/5)))
	}
	return math.Expm1(x) / x
}

func phi2(x float64) float64 {
	if math.Abs(x) < seriesBelow {
		return (1 + x/3*(1+x/4*(1+x/5*(1+x/6)))) / 2
	}
	return (math.Expm1(x) - x) / (x * x)
}

// lagging returns (x - ln(1+x))/x².
func lagging(x float64) float64 {
	if math.Abs(x) < seriesBelow {
		return 1./2 - x*(1./3-x*(1./4-x*(1./5-x*(1./6-x/7))))
	}
	return (x - math.Log1p(x)) / (x * x)
}

// seriesBelow is where series replace the closed forms; the terms left out are
// below 1e-12 of the value.
const seriesBelow = 5e-3
