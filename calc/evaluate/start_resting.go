package evaluate

import (
	"math"

	"railproof/calc/switched"
)

// startDiscontinuous is start where the current rests at zero. To what the triangle of
// the lossless stage with a constant output gives,
//
//	p = sqrt{2 I T/[L (1/U1 + 1/U2)]},  t1, t2 = p L/U1, p L/U2,  U1 = Vin − Vo, U2 = Vo + VF
//
// it adds the first terms of resistances and ripple: with charges q1, q2 of rise and
// fall, δ the output's deviation from its mean, and b1, b2 the charges by which the
// pieces leave their chords,
//
//	L p = U1 t1 − R1 q1 − ∫δ = U2 t2 + R2 q2 + ∫δ,  q1 + q2 = p (t1 + t2)/2 + b1 + b2 = I T
//	b1 = [(R1 + r) p/t1 + (p/2 − I)/C] t1³/(12 L),  b2 = [−(R2 + r) p/t2 + (p/2 − I)/C] t2³/(12 L)
//
// Derived as start is.
func (e *Evaluator) startDiscontinuous(c *switched.Circuit, output, i, fixedDuty float64) {
	leg, sol := &c.Leg, &e.solution
	one := &sol.Leg
	up, down := c.Vin-output, output+leg.Rectifier.Threshold
	longer, shorter, charge := 1.0, 1.0, i*c.Period // of rise, of fall, of both
	var p, t1, t2, b1, b2 float64
	for pass := range 2 {
		if fixedDuty < 0 {
			p = math.Sqrt(2 * (charge - b1 - b2) / (leg.L * (longer/up + shorter/down)))
			t1 = p * leg.L * longer / up
		} else {
			t1 = fixedDuty * c.Period
			p = up * t1 / leg.L
		}
		t2 = p * leg.L * shorter / down
		if pass > 0 || fixedDuty >= 0 || !(p > 0 && t1+t2 < c.Period) {
			break
		}
		r1, r2 := leg.HighSide+leg.Winding, leg.Rectifier.Slope+leg.Winding
		q1, q2 := p*t1/2, p*t2/2
		perC, esr, d1, d2 := 0.0, 0.0, 0.0, 0.0
		if c.Phases == 1 {
			var capacitance float64
			capacitance, esr = together(c)
			perC = 1 / capacitance
			d1, d2 = rippleAreas(c.Period, t1, t2, p, i, perC)
			d1, d2 = d1+esr*(q1-i*t1), d2+esr*(q2-i*t2)
		}
		push := (p/2 - i) * perC
		b1 = ((r1+esr)*p/t1 + push) * t1 * t1 * t1 / (12 * leg.L)
		b2 = (push - (r2+esr)*p/t2) * t2 * t2 * t2 / (12 * leg.L)
		longer, shorter = 1+(r1*q1+d1)/(leg.L*p), 1-(r2*q2+d2)/(leg.L*p)
	}
	perT := 1 / c.Period
	high, low := (p*p*t1/3+p*b1)*perT, (p*p*t2/3+p*b2)*perT
	one.Mode = switched.Discontinuous
	one.Valley, one.Peak, one.Conduct = 0, p, t2*perT
	one.Inductor = switched.Branch{Mean: i, RMS: math.Sqrt(high + low)}
	one.HighSide = switched.Branch{Mean: (p*t1/2 + b1) * perT, RMS: math.Sqrt(high)}
	one.Rectifier = switched.Branch{Mean: (p*t2/2 + b2) * perT, RMS: math.Sqrt(low)}
	one.TurnOn, one.TurnOff = 0, p
	sol.Duty = t1 * perT
	n := float64(c.Phases)
	sol.InputMean = n * one.HighSide.Mean
	sol.InputRMS = n * one.HighSide.RMS
	divide(triangle, sol.Duty, n*math.Sqrt(max(0, high+low-i*i)), c.Period, c.Bank[:c.Banks], &sol.BankRMS)
}

// rippleAreas returns the integrals over rise and fall [Vs] of what a capacitor's
// voltage has beyond its mean, under a triangle of peak p that lasts t1 + t2 and a load i.
func rippleAreas(period, t1, t2, p, i, perC float64) (rise, fall float64) {
	t3 := period - t1 - t2
	w1 := (p/2 - i) * t1 * perC // at the peak, counted from turn-on
	w2 := w1 + (p/2-i)*t2*perC
	rise = (p/6 - i/2) * t1 * t1 * perC
	fall = w1*t2 + (p/3-i/2)*t2*t2*perC
	start := -(rise + fall + w2*t3 - i*t3*t3/2*perC) / period // at turn-on
	return rise + start*t1, fall + start*t2
}
