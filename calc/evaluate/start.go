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
// and, where a rectifier that blocks would see its current reverse, the
// discontinuous D = sqrt(2 L f I (Vo + VF)/[(Vin − Vo)(Vin + VF)]).
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

func (e *Evaluator) startDiscontinuous(c *switched.Circuit, output, i, fixedDuty float64) {
	leg, sol := &c.Leg, &e.solution
	one := &sol.Leg
	vf := leg.Rectifier.Threshold
	d := fixedDuty
	if d < 0 {
		d = math.Sqrt(2 * leg.L * i * (output + vf) / (c.Period * (c.Vin - output) * (c.Vin + vf)))
	}
	one.Mode = switched.Discontinuous
	one.Valley, one.Peak = 0, (c.Vin-output)*d*c.Period/leg.L
	one.Conduct = one.Peak * leg.L / (c.Period * (output + vf))
	third := one.Peak * one.Peak / 3
	one.Inductor = switched.Branch{Mean: i, RMS: math.Sqrt((d + one.Conduct) * third)}
	one.HighSide = switched.Branch{Mean: one.Peak * d / 2, RMS: math.Sqrt(d * third)}
	one.Rectifier = switched.Branch{Mean: one.Peak * one.Conduct / 2, RMS: math.Sqrt(one.Conduct * third)}
	one.TurnOn, one.TurnOff = 0, one.Peak
	sol.Duty = d
	sol.InputMean = float64(c.Phases) * one.HighSide.Mean
	sol.InputRMS = float64(c.Phases) * one.HighSide.RMS
	divide(triangle, d, float64(c.Phases)*math.Sqrt(max(0, (d+one.Conduct)*third-i*i)), c.Period, c.Bank[:c.Banks], &sol.BankRMS)
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
