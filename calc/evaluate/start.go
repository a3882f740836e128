package evaluate

import (
	"math"

	"railproof/calc/switched"
)

// start fills the solution with the nearly triangular currents of a stage whose
// output voltage is nearly constant: where the joint iteration begins, never a
// result.
//
//	D = [Vo + VF + I (Rw + Rr)] / [Vin + VF − I (Rhs − Rr)]
//	ΔI = [Vin − Vo − I (Rhs + Rw)] t1/L · [1 + t1 t2/(12 L C)]
//	b1 = ΔI (R1 + r) t1/(12 L),  b2 = ΔI (R2 + r) t2/(12 L)
//	I1 = I + (1 − D) (b1 + b2),  Ivalley, Ipeak = I1 − b1 ∓ ΔI/2
//
// t1, t2 are on- and off-time, R1, R2 the resistances of their paths, C, r the
// output capacitor, I1 is the mean current of the on-time, and b1, b2 are by how much
// the mean of a piece leaves its chord: the first terms of what the capacitor's ripple
// and the resistances bend, by integrating the triangle once more. With several phases
// those of the capacitor are left out.
// Where a rectifier that blocks would see its current reverse, startDiscontinuous takes
// over.
//
// Source: volt-second balance; R. W. Erickson and D. Maksimović, Fundamentals of
// Power Electronics, chapter 5 and appendix A (remembered, unverified).
func (e *Evaluator) start(c *switched.Circuit, output, load, fixedDuty float64) {
	leg, sol := &c.Leg, &e.solution
	sol.OutputMean, sol.OutputPower = output, output*load
	sol.Leg, sol.BankRMS = switched.LegSolution{}, [switched.MaxBanks]float64{}
	if c.Legs != nil {
		sol.Legs = [switched.MaxPhases]switched.LegSolution{}
	}
	one := &sol.Leg
	n := float64(c.Phases)
	i := load / n
	vf, rr := leg.Rectifier.Threshold, leg.Rectifier.Slope
	d := fixedDuty
	if d < 0 {
		d = min(1, (output+vf+i*(leg.Winding+rr))/(c.Vin+vf-i*(leg.HighSide-rr)))
	}
	off := 1 - d
	t1, t2, inverse := d*c.Period, off*c.Period, 1/leg.L
	ripple := max(0, c.Vin-output-i*(leg.HighSide+leg.Winding)) * t1 * inverse
	esr := 0.0
	if c.Phases == 1 {
		var capacitance float64
		capacitance, esr = together(c)
		ripple *= 1 + t1*t2*inverse/(12*capacitance)
	}
	part := ripple * inverse / 12
	rises, falls := part*(leg.Winding+leg.HighSide+esr)*t1, part*(leg.Winding+rr+esr)*t2
	on := i + off*(rises+falls)
	middle := on - rises
	fall := i
	if off > 0 {
		fall = (i - d*on) / off
	}
	one.Mode, one.Conduct = switched.Continuous, off
	one.Valley, one.Peak = middle-ripple/2, middle+ripple/2
	if leg.Rectifier.Blocks && one.Valley < 0 && c.Vin > output {
		e.startDiscontinuous(c, output, i, fixedDuty)
		return
	}
	square := ripple * ripple / 12
	high, low := d*(on*on+square), off*(fall*fall+square)
	one.Inductor = switched.Branch{Mean: i, RMS: math.Sqrt(high + low)}
	one.HighSide = switched.Branch{Mean: d * on, RMS: math.Sqrt(high)}
	one.Rectifier = switched.Branch{Mean: off * fall, RMS: math.Sqrt(low)}
	one.TurnOn, one.TurnOff = one.Valley, one.Peak
	sol.Duty = d
	divide(triangle, d, n*math.Sqrt(square), c.Period, c.Bank[:c.Banks], &sol.BankRMS)
	sol.InputMean = n * one.HighSide.Mean
	sol.InputRMS = n * one.HighSide.RMS
}

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

// wave is a shape of periodic current by how fast its harmonics fall.
type wave int

const (
	rectangle wave = 1 // an = sin(n π D)/n
	triangle  wave = 2 // an = sin(n π D)/n²
)

// total is Σ an² over all harmonics.
func (w wave) total(duty float64) float64 {
	x := math.Pi * math.Pi * duty * (1 - duty)
	if w == rectangle {
		return x / 2
	}
	return x * x / 6
}

// dividedHarmonics is how many harmonics of a current the closed form divides one by
// one.
const dividedHarmonics = 3

// divide shares the RMS value of a current [A] among banks in parallel: its first
// harmonics by the banks' admittances, the rest by their conductances.
//
//	Ik² = I² [Σ an² |Yk(n ω)/ΣY(n ω)|² + (A − Σ an²) (gk/Σg)²]/A,  A = Σ an² over all
func divide(w wave, duty, rms, period float64, bank []switched.Bank, share *[switched.MaxBanks]float64) {
	whole := w.total(duty)
	if len(bank) == 1 || !(rms > 0 && whole > 0) {
		share[0] = rms
		return
	}
	var sum [switched.MaxBanks]float64
	left := whole
	for n := 1.0; n <= dividedHarmonics; n++ {
		omega := 2 * math.Pi * n / period
		a := math.Sin(n*math.Pi*duty) / n
		if w == triangle {
			a /= n
		}
		left -= a * a
		var y [switched.MaxBanks]complex128
		var all complex128
		for k := range bank {
			y[k] = admittance(&bank[k], omega)
			all += y[k]
		}
		for k := range bank {
			sum[k] += a * a * square(y[k]) / square(all)
		}
	}
	conductance := 0.0
	for k := range bank {
		conductance += 1 / bank[k].ESR
	}
	for k := range bank {
		part := 1 / (bank[k].ESR * conductance)
		share[k] = rms * math.Sqrt((sum[k]+max(0, left)*part*part)/whole)
	}
}

func square(z complex128) float64 { return real(z)*real(z) + imag(z)*imag(z) }

// together returns the capacitance [F] and series resistance [ohm] that the output
// banks in parallel have at the switching frequency.
func together(c *switched.Circuit) (capacitance, r float64) {
	if c.Banks == 1 {
		return c.Bank[0].C, c.Bank[0].ESR
	}
	omega := 2 * math.Pi / c.Period
	var y complex128
	for k := range c.Banks {
		y += admittance(&c.Bank[k], omega)
	}
	z := 1 / y
	return -1 / (omega * imag(z)), real(z)
}

// admittance is a bank's [S] at an angular frequency [rad/s].
func admittance(b *switched.Bank, omega float64) complex128 {
	return 1 / complex(b.ESR, -1/(omega*b.C))
}
