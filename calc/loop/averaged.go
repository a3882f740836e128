package loop

import (
	"math"
	"math/cmplx"

	"railproof/calc/parts"
	"railproof/calc/switched"
)

// Transfers are the small-signal transfer functions of a stage at one frequency.
type Transfers struct {
	Duty            complex128 // [V] duty ratio to output; NaN where the model has none
	Control         complex128 // [1] control voltage to output
	Line            complex128 // [1] source voltage to output, loop open
	Impedance       complex128 // [ohm] output impedance, loop open
	Loop            complex128 // [1] loop gain
	ClosedLine      complex128 // [1] source voltage to output, loop closed
	ClosedImpedance complex128 // [ohm] output impedance, loop closed
}

// Averaged is the averaged small-signal model of a plant. Its source is taken as
// stiff; Interaction adds the effect of a source impedance.
//
// Each phase k is a current into the output node, all of them in parallel,
//
//	ik = ak d + bk vin - yk vo,  vo = Zp (sum of ik - load)
//	Zp = 1/(G + sum of 1/(Rj + 1/(s Cj)))
//
// and in continuous conduction
//
//	ak = Ve/Z, bk = D/Z, yk = 1/Z,  Z = s L + R
//
//	R  [ohm] winding + D Rhs + (1-D) Rrect
//	Ve [V]   Vin + Vth - I (Rhs - Rrect), I the mean inductor current of a phase
//
// Capacitor banks are kept apart, and so are unequal phases, but for the mean current,
// of which each is taken to carry its equal share. A constant-current load damps
// nothing. The modulator is d = (vc - vramp)/(VM) in voltage mode, delayed by the
// comparator's delay: a naturally sampled trailing edge adds no delay of its own.
// In discontinuous conduction the inductor is a current source, see resting.
// Valid up to about a fifth of the switching frequency.
//
// Source: R. W. Erickson, D. Maksimovic, Fundamentals of Power Electronics,
// 2nd ed., 2001, chapters 7 to 11 (remembered, unverified); losses added. Checked
// by TestReferenceLoop loop-01 to loop-07 and against the sampled-data model.
type Averaged struct {
	plant  Plant
	count  int     // of limbs
	weight float64 // [1] phases that each of them stands for
	limb   [switched.MaxPhases]limb
}

// limb is one phase, or each of equal ones.
type limb struct {
	leg     switched.Leg
	rests   bool    // in discontinuous conduction
	r       float64 // [ohm] effective series resistance
	swing   float64 // [V] Ve
	current float64 // [A] mean current
	resting resting
	mode    currentMode
}

// Set prepares the averaged model of a plant.
func (a *Averaged) Set(p *Plant) {
	c, d := &p.Circuit, p.Duty
	*a = Averaged{plant: *p, count: 1, weight: float64(c.Phases)}
	if c.Legs != nil {
		a.count, a.weight = c.Phases, 1
	}
	a.plant.Circuit.Legs = nil // the limbs have them
	for k := range a.count {
		l := &a.limb[k]
		l.leg, l.rests = *p.leg(k), p.mode(k) == switched.Discontinuous
		rect := &l.leg.Rectifier
		l.r = l.leg.Winding + d*l.leg.HighSide + (1-d)*rect.Slope
		l.current = (c.Current + c.Conductance*p.Output) / float64(c.Phases)
		l.swing = c.Vin + rect.Threshold - l.current*(l.leg.HighSide-rect.Slope)
		if l.rests {
			l.resting.set(p, &l.leg)
		}
		if p.Modulator.Mode == parts.PeakCurrentMode {
			l.mode.set(p, l)
		}
	}
}

// flow is how the current of a phase follows what moves it.
type flow struct {
	drive, line, output complex128 // [S] by duty ratio or control voltage, source voltage, output voltage, which takes from it
}

// bare returns the flow of a limb with the duty ratio as its drive.
func (l *limb) bare(s complex128, duty float64) flow {
	if l.rests {
		r := &l.resting
		return flow{complex(r.byDuty, 0), complex(r.byLine, 0), complex(-r.byOutput, 0)}
	}
	y := 1 / (s*complex(l.leg.L, 0) + complex(l.r, 0))
	return flow{complex(l.swing, 0) * y, complex(duty, 0) * y, y}
}

// command is how the duty ratio of a limb follows control voltage, its current, and
// the voltages.
type command struct {
	control, current, line, output complex128
}

// command returns that of a limb at s.
func (a *Averaged) command(l *limb, s complex128) command {
	lag := cmplx.Exp(-s * complex(a.plant.Modulator.Delay, 0))
	if a.plant.Modulator.Mode == parts.PeakCurrentMode {
		return l.mode.command(s, lag)
	}
	m := command{control: lag * complex(1/(a.plant.RampSlope()*a.plant.Circuit.Period), 0)}
	if a.plant.Modulator.FeedForward {
		m.line = complex(-a.plant.Duty/a.plant.Circuit.Vin, 0)
	}
	return m
}

// under returns the flow of a limb whose duty ratio is commanded, with the control
// voltage as its drive.
func (f flow) under(m command) flow {
	inner := 1 - f.drive*m.current
	return flow{f.drive * m.control / inner, (f.line + f.drive*m.line) / inner, (f.output - f.drive*m.output) / inner}
}

// plus returns the sum of two flows, the second taken so many times.
func (f flow) plus(g flow, times float64) flow {
	n := complex(times, 0)
	return flow{f.drive + n*g.drive, f.line + n*g.line, f.output + n*g.output}
}

// sums returns the flow of all phases, with the duty ratio and with the control
// voltage as the drive.
func (a *Averaged) sums(s complex128) (bare, under flow) {
	for k := range a.count {
		l := &a.limb[k]
		one := l.bare(s, a.plant.Duty)
		bare, under = bare.plus(one, a.weight), under.plus(one.under(a.command(l, s)), a.weight)
	}
	return bare, under
}

// At returns the transfer functions at a frequency [Hz].
func (a *Averaged) At(frequency float64) Transfers {
	s := complex(0, 2*math.Pi*frequency)
	bare, under := a.sums(s)
	load := 1 / a.load(s)
	y := load + under.output
	t := Transfers{Duty: bare.drive / (load + bare.output), Control: under.drive / y, Line: under.line / y, Impedance: 1 / y}
	if a.plant.Modulator.Mode == parts.PeakCurrentMode {
		t.Duty = complex(math.NaN(), math.NaN())
	}
	if a.plant.Compensator.Present {
		t.Loop = t.Control * CompensatorGain(&a.plant.Compensator, &a.plant.Feedback, frequency)
		t.ClosedLine = t.Line / (1 + t.Loop)
		t.ClosedImpedance = t.Impedance / (1 + t.Loop)
	}
	return t
}

// load returns the impedance of banks and load in parallel.
func (a *Averaged) load(s complex128) complex128 {
	c := &a.plant.Circuit
	y := complex(c.Conductance, 0)
	for k := range c.Banks {
		y += c.Bank[k].Admittance(s)
	}
	return 1 / y
}
