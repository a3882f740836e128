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
// In continuous conduction, with N phases in parallel,
//
//	Zs = (s L + R)/N,  Zp = 1/(G + sum of 1/(Rk + 1/(s Ck))),  F = Zp/(Zp + Zs)
//	duty to output     Ve F
//	line to output     D F
//	output impedance   Zs Zp/(Zs + Zp)
//
//	R  [ohm] winding + D Rhs + (1-D) Rrect
//	Ve [V]   Vin + Vth - I (Rhs - Rrect), I the mean inductor current of a phase
//
// Capacitor banks are kept apart; a constant-current load damps nothing.
// The modulator is d = (vc - vramp)/(VM) in voltage mode, delayed by the
// comparator's delay: a naturally sampled trailing edge adds no delay of its own.
// In discontinuous conduction the inductor is a current source, see resting.
// Valid up to about a fifth of the switching frequency.
//
// Source: R. W. Erickson, D. Maksimovic, Fundamentals of Power Electronics,
// 2nd ed., 2001, chapters 7 to 11 (remembered, unverified); losses added. Checked
// by TestReferenceLoop loop-01 to loop-07 and against the sampled-data model.
type Averaged struct {
	plant   Plant
	leg     switched.Leg
	phases  float64
	r       float64 // [ohm] effective series resistance of one phase
	swing   float64 // [V] Ve
	current float64 // [A] mean current of one phase
	resting resting
	mode    currentMode
}

// Set prepares the averaged model of a plant.
func (a *Averaged) Set(p *Plant) {
	*a = Averaged{plant: *p, leg: p.average(), phases: float64(p.Circuit.Phases)}
	c, d := &p.Circuit, p.Duty
	rect := &a.leg.Rectifier
	a.r = a.leg.Winding + d*a.leg.HighSide + (1-d)*rect.Slope
	a.current = (c.Current + c.Conductance*p.Output) / a.phases
	a.swing = c.Vin + rect.Threshold - a.current*(a.leg.HighSide-rect.Slope)
	if p.Mode == switched.Discontinuous {
		a.resting.set(p, &a.leg)
	}
	if p.Modulator.Mode == parts.PeakCurrentMode {
		a.mode.set(a)
	}
}

// At returns the transfer functions at a frequency [Hz].
func (a *Averaged) At(frequency float64) Transfers {
	s := complex(0, 2*math.Pi*frequency)
	var g open
	if a.plant.Mode == switched.Discontinuous {
		g = a.resting.at(a, s)
	} else {
		g = a.continuous(s)
	}
	t := Transfers{Duty: g.duty, Line: g.line, Impedance: g.impedance}
	lag := cmplx.Exp(-s * complex(a.plant.Modulator.Delay, 0))
	if a.plant.Modulator.Mode == parts.PeakCurrentMode {
		a.mode.close(s, lag, &g, &t)
	} else {
		slope := a.plant.RampSlope()
		t.Control = g.duty * complex(1/(slope*a.plant.Circuit.Period), 0) * lag
		if a.plant.Modulator.FeedForward {
			t.Line -= g.duty * complex(a.plant.Duty/a.plant.Circuit.Vin, 0)
		}
	}
	if a.plant.Compensator.Present {
		t.Loop = t.Control * CompensatorGain(&a.plant.Compensator, &a.plant.Feedback, frequency)
		t.ClosedLine = t.Line / (1 + t.Loop)
		t.ClosedImpedance = t.Impedance / (1 + t.Loop)
	}
	return t
}

// open holds the transfer functions of the bare stage: to the output voltage and
// to the inductor current of one phase.
type open struct {
	duty, line, impedance                 complex128
	dutyCurrent, lineCurrent, loadCurrent complex128
}

// load returns the impedance of banks and load in parallel.
func (a *Averaged) load(s complex128) complex128 {
	c := &a.plant.Circuit
	y := complex(c.Conductance, 0)
	for k := range c.Banks {
		y += 1 / (complex(c.Bank[k].ESR, 0) + 1/(s*complex(c.Bank[k].C, 0)))
	}
	return 1 / y
}

func (a *Averaged) continuous(s complex128) open {
	n := complex(a.phases, 0)
	zp := a.load(s)
	zs := (s*complex(a.leg.L, 0) + complex(a.r, 0)) / n
	sum := zp + zs
	d := complex(a.plant.Duty, 0)
	ve := complex(a.swing, 0)
	return open{
		duty: ve * zp / sum, line: d * zp / sum, impedance: zp * zs / sum,
		dutyCurrent: ve / (sum * n), lineCurrent: d / (sum * n), loadCurrent: zp / (sum * n),
	}
}
