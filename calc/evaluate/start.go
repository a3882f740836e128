package evaluate

import (
	"math"

	"railproof/calc/switched"
)

// start fills the solution with the triangular currents of a stage whose output
// voltage is constant: where the joint iteration begins, never a result.
//
//	D = [Vo + VF + I (Rw + Rr)] / [Vin + VF − I (Rhs − Rr)]
//	ΔI = [Vin − Vo − I (Rhs + Rw)] D/(L f)
//
// and, where a rectifier that blocks would see its current reverse, the
// discontinuous D = sqrt(2 L f I (Vo + VF)/[(Vin − Vo)(Vin + VF)]).
//
// Source: volt-second balance; R. W. Erickson and D. Maksimović, Fundamentals of
// Power Electronics, chapter 5 and appendix A (remembered, unverified).
func (e *Evaluator) start(c *switched.Circuit, output, load, fixedDuty float64) {
	leg, sol := &c.Leg, &e.solution
	*sol = switched.Solution{OutputMean: output, OutputPower: output * load}
	one := &sol.Leg
	n := float64(c.Phases)
	i := load / n
	vf, rr := leg.Rectifier.Threshold, leg.Rectifier.Slope
	d := fixedDuty
	if d < 0 {
		d = math.Min(1, (output+vf+i*(leg.Winding+rr))/(c.Vin+vf-i*(leg.HighSide-rr)))
	}
	ripple := math.Max(0, c.Vin-output-i*(leg.HighSide+leg.Winding)) * d * c.Period / leg.L
	one.Mode, one.Conduct = switched.Continuous, 1-d
	one.Valley, one.Peak = i-ripple/2, i+ripple/2
	if leg.Rectifier.Blocks && one.Valley < 0 && c.Vin > output {
		e.startDiscontinuous(c, output, i, fixedDuty)
		return
	}
	square := i*i + ripple*ripple/12
	one.Inductor = switched.Branch{Mean: i, RMS: math.Sqrt(square)}
	one.HighSide = switched.Branch{Mean: d * i, RMS: math.Sqrt(d * square)}
	one.Rectifier = switched.Branch{Mean: (1 - d) * i, RMS: math.Sqrt((1 - d) * square)}
	one.TurnOn, one.TurnOff = one.Valley, one.Peak
	sol.Duty = d
	sol.BankRMS[0] = n * math.Sqrt(ripple*ripple/12)
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
	sol.BankRMS[0] = float64(c.Phases) * math.Sqrt(math.Max(0, (d+one.Conduct)*third-i*i))
}
