package service

import (
	"math"

	"railproof/calc/losses"
	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/stage"
)

// Equation is one figure and how it follows.
type Equation struct {
	Quantity string
	Formula  string  // in symbols
	Inputs   []Input // every symbol of it
	Value    float64 // [any] in Unit, as the answer gives it
	Unit     string
	Source   string
}

// Input is one symbol of a formula.
type Input struct {
	Symbol string
	Value  float64 // [any] in Unit
	Unit   string
}

// reproduces is how near the formula's value must come to the answer's to explain
// it: the circuit was solved with temperatures that may differ by the tolerance of
// the equilibrium.
const reproduces = 1e-5 // [1]

// ExplainLosses tells how loss items follow from the figures of a point. An item
// that the formula does not reproduce, as those of unequal phases, has none.
func ExplainLosses(s *stage.Stage, p *stage.Point, o *Outcome) []Equation {
	x := explainer{s: s, p: p, o: o, q: &o.Quantities}
	var list []Equation
	for i := range o.Losses.Items[:o.Losses.N] {
		item := &o.Losses.Items[i]
		e, value := x.item(item)
		if math.Abs(value-item.Power) <= reproduces*math.Abs(item.Power) {
			e.Quantity, e.Value, e.Unit = item.Part.String()+"/"+item.Mechanism.String(), item.Power, "W"
			list = append(list, e)
		}
	}
	return append(list, x.totals()...)
}

// explainer puts the figures of one point into formulas.
type explainer struct {
	s *stage.Stage
	p *stage.Point
	o *Outcome
	q *quantity.Vector
}

func (x *explainer) degC(p losses.Part) float64 { return x.o.PartDegC[p] }

// item returns the equation of a loss item and the value that it gives; NaN for a
// mechanism that no formula here explains.
func (x *explainer) item(i *losses.Item) (Equation, float64) {
	switch i.Part {
	case losses.HighSide:
		return x.highSide(i.Mechanism)
	case losses.LowSide, losses.Diode:
		return x.rectifier(i.Mechanism)
	case losses.Inductor:
		return x.inductor(i.Mechanism)
	case losses.Controller:
		return x.controller(i.Mechanism)
	case losses.Board:
		return x.board(i.Mechanism)
	}
	return x.capacitor(i.Part)
}

func (x *explainer) highSide(m losses.Mechanism) (Equation, float64) {
	hs, c, q := &x.s.HighSide, &x.s.Controller, x.q
	f, vin := x.s.SwitchingFrequency, q[quantity.BridgeVoltage]
	switch m {
	case losses.Conduction:
		r, _ := hs.OnResistanceAt(x.degC(losses.HighSide), c.Drive)
		i := q[quantity.HighSideRMS]
		return Equation{Formula: "P = R Irms²", Inputs: []Input{{"R", r, "Ohm"}, {"Irms", i, "A"}}, Source: "Ohm's law at the junction temperature"}, losses.Resistive(r, i*i)
	case losses.Overlap:
		charge := hs.SwitchChargeAt(vin)
		on := losses.Transition(charge, c.GateOn+hs.InternalGate, c.Drive-hs.Plateau)
		off := losses.Transition(charge, c.GateOff+hs.InternalGate, hs.Plateau)
		valley, peak := q[quantity.InductorValley], q[quantity.InductorPeak]
		return Equation{
			Formula: "P = Vin f (max(Ion, 0) ton + max(Ioff, 0) toff)/2, t = Qsw R/V",
			Inputs:  []Input{{"Vin", vin, "V"}, {"f", f, "Hz"}, {"Ion", valley, "A"}, {"ton", on, "s"}, {"Ioff", peak, "A"}, {"toff", off, "s"}, {"Qsw", charge, "C"}},
			Source:  "linear transitions of current and voltage, one after the other",
		}, losses.OverlapLoss(vin, f, valley, peak, on, off)
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
		charge := x.s.LowSide.RecoveryCharge
		if x.s.Rectifier == stage.DiodeRectified {
			charge = x.s.Diode.RecoveryCharge
		}
		return Equation{Formula: "P = Vin Qrr f", Inputs: []Input{{"Vin", vin, "V"}, {"Qrr", charge, "C"}, {"f", f, "Hz"}}, Source: "charge drawn through the switch"}, losses.RecoveryLoss(vin, charge, f)
	case losses.JunctionCharge:
		charge, energy := x.s.Diode.JunctionChargeAt(vin)
		return Equation{Formula: "P = f (Vin Qj − Ej)", Inputs: []Input{{"f", f, "Hz"}, {"Vin", vin, "V"}, {"Qj", charge, "C"}, {"Ej", energy, "J"}}, Source: "charge and energy of the diode's junction"}, losses.OutputChargeLoss(vin, f, 0, charge, energy)
	}
	return Equation{}, math.NaN()
}

func (x *explainer) rectifier(m losses.Mechanism) (Equation, float64) {
	ls, d, c, q := &x.s.LowSide, &x.s.Diode, &x.s.Controller, x.q
	f, td := x.s.SwitchingFrequency, c.DeadTime
	on, off, i := q[quantity.InductorValley], q[quantity.InductorPeak], q[quantity.RectifierRMS]
	switch {
	case m == losses.Conduction && x.s.Rectifier == stage.DiodeRectified:
		vt, _ := d.ThresholdAt(x.degC(losses.Diode))
		mean := q[quantity.RectifierMean]
		return Equation{Formula: "P = Vt Imean + Rd Irms²", Inputs: []Input{{"Vt", vt, "V"}, {"Imean", mean, "A"}, {"Rd", d.Slope, "Ohm"}, {"Irms", i, "A"}}, Source: "threshold and slope of the diode"}, losses.DiodeConduction(vt, d.Slope, mean, i*i)
	case m == losses.Conduction:
		r, _ := ls.OnResistanceAt(x.degC(losses.LowSide), c.Drive)
		return Equation{
			Formula: "P = R (Irms² − f td (Ivl² + Ipk²))",
			Inputs:  []Input{{"R", r, "Ohm"}, {"Irms", i, "A"}, {"f", f, "Hz"}, {"td", td, "s"}, {"Ivl", on, "A"}, {"Ipk", off, "A"}},
			Source:  "Ohm's law at the junction temperature, without the dead times",
		}, losses.Resistive(r, i*i-losses.DeadTimeShare(f, td, on, off))
	case m == losses.DeadTime:
		return Equation{
			Formula: "P = f td Vsd (|Ivl| + |Ipk|)",
			Inputs:  []Input{{"f", f, "Hz"}, {"td", td, "s"}, {"Vsd", ls.BodyDiode, "V"}, {"Ivl", on, "A"}, {"Ipk", off, "A"}},
			Source:  "body diode at both edges",
		}, losses.DeadTimeLoss(f, td, ls.BodyDiode, on) + losses.DeadTimeLoss(f, td, ls.BodyDiode, off)
	case m == losses.Leakage:
		leak, _ := d.LeakageAt(x.degC(losses.Diode))
		duty, vin := q[quantity.DutyRatio], q[quantity.BridgeVoltage]
		return Equation{Formula: "P = D Vin Ir", Inputs: []Input{{"D", duty, "1"}, {"Vin", vin, "V"}, {"Ir", leak, "A"}}, Source: "reverse current at the junction temperature"}, losses.LeakageLoss(duty, vin, leak)
	}
	return Equation{}, math.NaN()
}

func (x *explainer) inductor(m losses.Mechanism) (Equation, float64) {
	l, q := &x.s.Inductor, x.q
	r, _ := l.DCResistanceAt(x.degC(losses.Inductor))
	mean, rms := q[quantity.InductorMean], q[quantity.InductorRMS]
	switch m {
	case losses.WindingDC:
		return Equation{Formula: "P = Rdc Imean²", Inputs: []Input{{"Rdc", r, "Ohm"}, {"Imean", mean, "A"}}, Source: "copper at the winding temperature"}, losses.WindingDCLoss(r, mean)
	case losses.WindingAC:
		return Equation{Formula: "P = rac Rdc (Irms² − Imean²)", Inputs: []Input{{"rac", l.ACResistanceRatio, "1"}, {"Rdc", r, "Ohm"}, {"Irms", rms, "A"}, {"Imean", mean, "A"}}, Source: "copper at the winding temperature"}, losses.WindingACLoss(r, l.ACResistanceRatio, mean, rms*rms)
	case losses.CoreHysteresis:
		density, volume := q[quantity.CorePowerDensity], l.Core.Volume
		return Equation{
			Formula: "P = pv Ve, pv from the improved generalised Steinmetz equation",
			Inputs:  []Input{{"pv", density, "W/m3"}, {"Ve", volume, "m3"}, {"k", l.Core.K, "1"}, {"alpha", l.Core.Alpha, "1"}, {"beta", l.Core.Beta, "1"}, {"ΔB", q[quantity.FluxSwing], "T"}, {"f", x.s.SwitchingFrequency, "Hz"}},
			Source:  "improved generalised Steinmetz equation on the real flux",
		}, density * volume
	}
	return Equation{}, math.NaN()
}

func (x *explainer) controller(m losses.Mechanism) (Equation, float64) {
	c, q := &x.s.Controller, x.q
	vin, f := q[quantity.BridgeVoltage], x.s.SwitchingFrequency
	switch m {
	case losses.GateDrive:
		charge := x.s.HighSide.GateCharge
		if x.s.Rectifier != stage.DiodeRectified {
			charge += x.s.LowSide.GateCharge
		}
		v := map[parts.DriveSupply]float64{parts.DriveFromInput: vin, parts.DriveFromOutput: q[quantity.OutputMean], parts.DriveFromExternal: c.Drive}[c.DriveSupply]
		n := float64(x.s.PhaseCount)
		return Equation{Formula: "P = N Qg V f", Inputs: []Input{{"N", n, "1"}, {"Qg", charge, "C"}, {"V", v, "V"}, {"f", f, "Hz"}}, Source: "charge of the gates, from where the driver takes it"}, n * losses.GateDriveLoss(charge, v, f)
	case losses.Quiescent:
		return Equation{Formula: "P = Vin Iq", Inputs: []Input{{"Vin", vin, "V"}, {"Iq", c.QuiescentCurrent, "A"}}, Source: "definition"}, losses.QuiescentLoss(vin, c.QuiescentCurrent)
	case losses.Auxiliary:
		return Equation{Formula: "P = Paux", Inputs: []Input{{"Paux", c.AuxiliaryPower, "W"}}, Source: "given"}, c.AuxiliaryPower
	}
	return Equation{}, math.NaN()
}

// board explains the copper paths. They are at ambient temperature, or at the
// temperature that every part is held at.
func (x *explainer) board(m losses.Mechanism) (Equation, float64) {
	b, q := &x.s.Board, x.q
	copper := x.p.AmbientDegC
	if parts.Known(x.p.PartTemperatureDegC) {
		copper = x.p.PartTemperatureDegC
	}
	warm, _ := parts.CopperMultiplier(copper)
	n := float64(x.s.PhaseCount)
	path := func(r, i, count float64) (Equation, float64) {
		return Equation{Formula: "P = N R k I²", Inputs: []Input{{"N", count, "1"}, {"R", r, "Ohm"}, {"k", warm, "1"}, {"I", i, "A"}}, Source: "copper at the board's temperature"}, count * losses.Resistive(r*warm, i*i)
	}
	switch m {
	case losses.InputPath:
		return path(b.InputPath, q[quantity.InputMean], 1)
	case losses.SwitchNodePath:
		return path(b.SwitchNodePath, q[quantity.InductorRMS], n)
	}
	return Equation{}, math.NaN()
}

func (x *explainer) capacitor(p losses.Part) (Equation, float64) {
	bank, i := &x.s.InputCapacitors, x.q[quantity.InputCapacitorBankRMS:]
	k := int(p - losses.InputCapacitor)
	if p < losses.InputCapacitor {
		bank, i = &x.s.OutputCapacitors, x.q[quantity.OutputCapacitorRMS:]
		k = int(p - losses.OutputCapacitor)
	}
	c := &(*bank)[k]
	r, _ := c.ESRAt(x.degC(p), x.p.AgeRatio)
	return Equation{Formula: "P = ESR Irms²", Inputs: []Input{{"ESR", r, "Ohm"}, {"Irms", i[k], "A"}}, Source: "Ohm's law, resistance and current of the whole bank"}, losses.Resistive(r, i[k]*i[k])
}

// totals explains the sums that the items lead to.
func (x *explainer) totals() []Equation {
	q := x.q
	in, out, lost := q[quantity.InputPower], q[quantity.OutputPower], q[quantity.LossTotal]
	var list []Equation
	add := func(id quantity.ID, formula string, inputs ...Input) {
		if info, _ := quantity.Of(id); parts.Known(q[id]) {
			list = append(list, Equation{Quantity: info.Key, Formula: formula, Inputs: inputs, Value: q[id], Unit: info.Unit, Source: info.Source})
		}
	}
	add(quantity.LossTotal, "Ploss = Pin − Po, the sum of all items", Input{"Pin", in, "W"}, Input{"Po", out, "W"})
	add(quantity.Efficiency, "η = Po/Pin", Input{"Po", out, "W"}, Input{"Pin", out + lost, "W"})
	add(quantity.InputMean, "Iin = Pin/Vin", Input{"Pin", in, "W"}, Input{"Vin", x.p.Input, "V"})
	return list
}
