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
// those of the capacitor are left out. Where a rectifier that blocks would see its
// current reverse, startDiscontinuous takes over.
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
