package service

import (
	"math"
	"strconv"
	"strings"

	"railproof/calc/losses"
	"railproof/calc/magnetics"
	"railproof/calc/parts"
	"railproof/calc/stage"
	"railproof/calc/switched"
)

// phase is what the losses of one phase follow from.
type phase struct {
	leg             *switched.LegSolution
	hs, ls, winding float64 // [1] resistances over those of the stage
}

// phasesOf returns the phases whose mean the items are; one where all are equal.
func phasesOf(s *stage.Stage, op *losses.Operation) []phase {
	if op.Inductances == nil {
		return []phase{{&op.Solution.Leg, 1, 1, 1}}
	}
	list := make([]phase, s.PhaseCount)
	over := func(override, value float64) float64 {
		if !parts.Known(override) || value == 0 {
			return 1
		}
		return override / value
	}
	for k := range list {
		list[k] = phase{&op.Solution.Legs[k], 1, 1, 1}
		if k < len(s.Phases) {
			o := &s.Phases[k]
			list[k].hs, list[k].ls = over(o.HighSideOn, s.HighSide.OnResistance), over(o.LowSideOn, s.LowSide.OnResistance)
			list[k].winding = over(o.DCResistance, s.Inductor.DCResistance)
		}
	}
	return list
}

// mean explains an item of one phase. Of unequal phases it is the mean: their own
// symbols carry their number.
func (x *explainer) mean(formula string, shared []Input, source string, of func(p *phase) ([]Input, float64)) (Equation, float64) {
	value, n := 0.0, len(x.phases)
	for k := range x.phases {
		own, one := of(&x.phases[k])
		value += one / float64(n)
		for _, in := range own {
			if n > 1 {
				in.Symbol += "[" + strconv.Itoa(k) + "]"
			}
			shared = append(shared, in)
		}
	}
	if n > 1 {
		formula = strings.Replace(formula, " = ", " = mean over the phases of ", 1)
	}
	return Equation{Formula: formula, Inputs: shared, Source: source}, value
}

func (x *explainer) highSide(m losses.Mechanism) (Equation, float64) {
	hs, c := &x.s.HighSide, &x.s.Controller
	f, vin, td := x.s.SwitchingFrequency, x.op.Bridge, c.DeadTime
	switch m {
	case losses.Conduction:
		r, _ := hs.OnResistanceAt(x.at[losses.HighSide], c.Drive)
		return x.mean("P = R Irms²", nil, "Ohm's law at the junction temperature", func(p *phase) ([]Input, float64) {
			i := p.leg.HighSide.RMS
			return []Input{{"R", r * p.hs, "Ohm"}, {"Irms", i, "A"}}, losses.Resistive(r*p.hs, i*i)
		})
	case losses.Overlap:
		charge := hs.SwitchChargeAt(vin)
		rOn, rOff, vOn, vOff := c.GateOn+hs.InternalGate, c.GateOff+hs.InternalGate, c.Drive-hs.Plateau, hs.Plateau
		on, off := losses.Transition(charge, rOn, vOn), losses.Transition(charge, rOff, vOff)
		return x.mean("P = Vin f (max(Ion, 0) ton + max(Ioff, 0) toff)/2, ton = Qsw Ron/Von, toff = Qsw Roff/Voff",
			[]Input{{"Vin", vin, "V"}, {"f", f, "Hz"}, {"ton", on, "s"}, {"toff", off, "s"}, {"Qsw", charge, "C"}, {"Ron", rOn, "Ohm"}, {"Von", vOn, "V"}, {"Roff", rOff, "Ohm"}, {"Voff", vOff, "V"}},
			"linear transitions of current and voltage, one after the other", func(p *phase) ([]Input, float64) {
				return edges(p.leg), losses.OverlapLoss(vin, f, p.leg.TurnOn, p.leg.TurnOff, on, off)
			})
	case losses.OutputCharge:
		_, own := hs.OutputAt(vin)
		charge, energy := 0.0, 0.0
		if x.s.Rectifier != stage.DiodeRectified {
			charge, energy = x.s.LowSide.OutputAt(vin)
		}
		return Equation{
			Formula: "P = f (Eown + Vin Qpartner − Epartner)",
			Inputs:  []Input{{"f", f, "Hz"}, {"Eown", own, "J"}, {"Vin", vin, "V"}, {"Qpartner", charge, "C"}, {"Epartner", energy, "J"}},
			Source:  "charge and energy of the non-linear output capacitances",
		}, losses.OutputChargeLoss(vin, f, own, charge, energy)
	case losses.Recovery:
		return x.recovery()
	case losses.JunctionCharge:
		charge, energy := x.s.Diode.JunctionChargeAt(vin)
		return Equation{Formula: "P = f (Vin Qj − Ej)", Inputs: []Input{{"f", f, "Hz"}, {"Vin", vin, "V"}, {"Qj", charge, "C"}, {"Ej", energy, "J"}}, Source: "charge and energy of the diode's junction"}, losses.OutputChargeLoss(vin, f, 0, charge, energy)
	case losses.DeadTime:
		return x.mean("P = f td Vsd (max(−Ion, 0) + max(−Ioff, 0))", []Input{{"f", f, "Hz"}, {"td", td, "s"}, {"Vsd", hs.BodyDiode, "V"}},
			"body diode, at the edges with a reversed current", func(p *phase) ([]Input, float64) {
				i := math.Max(-p.leg.TurnOn, 0) + math.Max(-p.leg.TurnOff, 0)
				return edges(p.leg), losses.DeadTimeLoss(f, td, hs.BodyDiode, i)
			})
	}
	return Equation{}, math.NaN()
}

// edges gives the inductor current at both edges.
func edges(leg *switched.LegSolution) []Input {
	return []Input{{"Ion", leg.TurnOn, "A"}, {"Ioff", leg.TurnOff, "A"}}
}

func (x *explainer) recovery() (Equation, float64) {
	vin, f := x.op.Bridge, x.s.SwitchingFrequency
	charge := x.s.LowSide.RecoveryCharge
	if x.s.Rectifier == stage.DiodeRectified {
		charge = x.s.Diode.RecoveryCharge
	}
	return x.mean("P = s Vin Qrr f", []Input{{"Vin", vin, "V"}, {"Qrr", charge, "C"}, {"f", f, "Hz"}},
		"charge drawn through the switch; the share s is 1 but close to the border of conduction, and 0 beyond it", func(p *phase) ([]Input, float64) {
			share := 0.0
			if p.leg.Mode == switched.Continuous {
				share = losses.RecoveryShare(p.leg.TurnOn, p.leg.Peak-p.leg.Valley)
			}
			return []Input{{"s", share, "1"}}, share * losses.RecoveryLoss(vin, charge, f)
		})
}

func (x *explainer) rectifier(m losses.Mechanism) (Equation, float64) {
	ls, d, c := &x.s.LowSide, &x.s.Diode, &x.s.Controller
	f, td := x.s.SwitchingFrequency, c.DeadTime
	switch {
	case m == losses.Conduction && x.s.Rectifier == stage.DiodeRectified:
		vt, _ := d.ThresholdAt(x.at[losses.Diode])
		return x.mean("P = Vt Imean + Rd Irms²", []Input{{"Vt", vt, "V"}, {"Rd", d.Slope, "Ohm"}}, "threshold and slope of the diode", func(p *phase) ([]Input, float64) {
			mean, i := p.leg.Rectifier.Mean, p.leg.Rectifier.RMS
			return []Input{{"Imean", mean, "A"}, {"Irms", i, "A"}}, losses.DiodeConduction(vt, d.Slope, mean, i*i)
		})
	case m == losses.Conduction:
		r, _ := ls.OnResistanceAt(x.at[losses.LowSide], c.Drive)
		return x.mean("P = R max(Irms² − f td (Ion² + Ioff²), 0)", []Input{{"f", f, "Hz"}, {"td", td, "s"}},
			"Ohm's law at the junction temperature, without the dead times", func(p *phase) ([]Input, float64) {
				i, on, off := p.leg.Rectifier.RMS, p.leg.TurnOn, p.leg.TurnOff
				return append([]Input{{"R", r * p.ls, "Ohm"}, {"Irms", i, "A"}}, edges(p.leg)...), losses.Resistive(r*p.ls, math.Max(0, i*i-losses.DeadTimeShare(f, td, on, off)))
			})
	case m == losses.DeadTime:
		return x.mean("P = f td Vsd (max(Ion, 0) + max(Ioff, 0))", []Input{{"f", f, "Hz"}, {"td", td, "s"}, {"Vsd", ls.BodyDiode, "V"}},
			"body diode at both edges", func(p *phase) ([]Input, float64) {
				i := math.Max(p.leg.TurnOn, 0) + math.Max(p.leg.TurnOff, 0)
				return edges(p.leg), losses.DeadTimeLoss(f, td, ls.BodyDiode, i)
			})
	case m == losses.Leakage:
		leak, _ := d.LeakageAt(x.at[losses.Diode])
		duty, vin := x.op.Solution.Duty, x.op.Bridge
		return Equation{Formula: "P = D Vin Ir", Inputs: []Input{{"D", duty, "1"}, {"Vin", vin, "V"}, {"Ir", leak, "A"}}, Source: "reverse current at the junction temperature"}, losses.LeakageLoss(duty, vin, leak)
	}
	return Equation{}, math.NaN()
}

func (x *explainer) inductor(m losses.Mechanism) (Equation, float64) {
	l := &x.s.Inductor
	r, _ := l.DCResistanceAt(x.at[losses.Inductor])
	const source = "copper at the winding temperature"
	switch m {
	case losses.WindingDC:
		return x.mean("P = Rdc Imean²", nil, source, func(p *phase) ([]Input, float64) {
			mean := p.leg.Inductor.Mean
			return []Input{{"Rdc", r * p.winding, "Ohm"}, {"Imean", mean, "A"}}, losses.WindingDCLoss(r*p.winding, mean)
		})
	case losses.WindingAC:
		return x.mean("P = rac Rdc (Irms² − Imean²)", []Input{{"rac", l.ACResistanceRatio, "1"}}, source, func(p *phase) ([]Input, float64) {
			mean, rms := p.leg.Inductor.Mean, p.leg.Inductor.RMS
			return []Input{{"Rdc", r * p.winding, "Ohm"}, {"Irms", rms, "A"}, {"Imean", mean, "A"}}, losses.WindingACLoss(r*p.winding, l.ACResistanceRatio, mean, rms*rms)
		})
	case losses.CoreHysteresis:
		return x.core()
	}
	return Equation{}, math.NaN()
}

// core explains the core loss by the triangular flux of every phase.
func (x *explainer) core() (Equation, float64) {
	core, f, duty := &x.s.Inductor.Core, x.s.SwitchingFrequency, x.op.Solution.Duty
	warm, _ := core.CoreMultiplierAt(x.at[losses.Inductor])
	triangle := magnetics.PrepareTriangle(core.Alpha, core.Beta)
	triangle.At(core.K, f)
	k := -1
	return x.mean("P = kT ki f^α ΔB^β (D^(1−α) + D'^(1−α)) Ve, ΔB = L ΔI/(n Ae), ki = k/((2π)^(α−1) 2^(β−α) ∫|cos θ|^α dθ over a turn)", []Input{
		{"kT", warm, "1"},
		{"ki", magnetics.Steinmetz{K: core.K, Alpha: core.Alpha, Beta: core.Beta}.KI(), "1"},
		{"α", core.Alpha, "1"},
		{"β", core.Beta, "1"},
		{"f", f, "Hz"},
		{"D", duty, "1"},
		{"Ve", core.Volume, "m3"},
		{"k", core.K, "1"},
		{"n", core.Turns, "1"},
		{"Ae", core.Area, "m2"},
	}, "improved generalised Steinmetz equation on the real flux", func(p *phase) ([]Input, float64) {
		k++
		inductance, fall := x.op.Inductance, 1-duty
		if x.op.Inductances != nil {
			inductance = x.op.Inductances[k]
		}
		if p.leg.Mode == switched.Discontinuous {
			fall = p.leg.Conduct
		}
		swing := magnetics.FluxSwing(inductance*(p.leg.Peak-p.leg.Valley), core.Turns, core.Area)
		own := []Input{{"ΔB", swing, "T"}, {"D'", fall, "1"}}
		if x.s.PhaseCount == 1 { // of several, too long for one line
			own = append(own, Input{"L", inductance, "H"}, Input{"ΔI", p.leg.Peak - p.leg.Valley, "A"})
		}
		return own, warm * triangle.Density(swing, duty, fall) * core.Volume
	})
}
