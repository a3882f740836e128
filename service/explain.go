package service

import (
	"math"

	"railproof/calc/evaluate"
	"railproof/calc/losses"
	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/stage"
	"railproof/calc/thermal"
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
// it. Both are sums of the same products, but the last step of the equilibrium, at
// most its tolerance, lies between the bridge voltage and the input current of one
// and of the other.
const reproduces = 1e-6 // [1]

// ExplainLosses tells how every loss item and the totals follow at a point. It
// evaluates the point again for the currents at the switching instants.
func ExplainLosses(s *stage.Stage, p *stage.Point, o *Outcome) []Equation {
	e := evaluate.Prepare(s)
	var again evaluate.Result
	e.Eval(p, &again)
	x := explainer{s: s, p: p, q: &o.Quantities, op: e.Operation(), at: e.CircuitDegC()}
	x.phases = phasesOf(s, x.op)
	var list []Equation
	for i := range o.Losses.Items[:o.Losses.N] {
		item := &o.Losses.Items[i]
		eq, value := x.item(item)
		if math.Abs(value-item.Power) <= reproduces*math.Abs(item.Power) {
			eq.Quantity, eq.Value, eq.Unit = item.Part.String()+"/"+item.Mechanism.String(), item.Power, "W"
			list = append(list, eq)
		}
	}
	return append(list, x.totals()...)
}

// explainer puts the figures of one point into formulas.
type explainer struct {
	s      *stage.Stage
	p      *stage.Point
	q      *quantity.Vector
	op     *losses.Operation
	at     *thermal.Vector // [degC] of the parts as the circuit was solved
	phases []phase         // one where all are equal
}

// rests reports whether the switches do not switch.
func (x *explainer) rests() bool { return !(x.op.Solution.Duty > 0 && x.op.Solution.Duty < 1) }

// switching lists the mechanisms that need edges.
var switching = map[losses.Mechanism]bool{
	losses.Overlap: true, losses.OutputCharge: true, losses.Recovery: true, losses.JunctionCharge: true, losses.DeadTime: true, losses.GateDrive: true,
}

// item returns the equation of a loss item and the value that it gives; NaN for a
// mechanism that no formula here explains.
func (x *explainer) item(i *losses.Item) (Equation, float64) {
	if x.rests() && switching[i.Mechanism] {
		return Equation{Formula: "P = 0, the switches rest", Inputs: []Input{{"D", x.op.Solution.Duty, "1"}}, Source: "no edges"}, 0
	}
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

func (x *explainer) controller(m losses.Mechanism) (Equation, float64) {
	c, vin, f := &x.s.Controller, x.op.Bridge, x.s.SwitchingFrequency
	switch m {
	case losses.GateDrive:
		charge := x.s.HighSide.GateCharge
		if x.s.Rectifier != stage.DiodeRectified {
			charge += x.s.LowSide.GateCharge
		}
		v := map[parts.DriveSupply]float64{parts.DriveFromInput: vin, parts.DriveFromOutput: x.op.Output, parts.DriveFromExternal: c.Drive}[c.DriveSupply]
		n := float64(x.s.PhaseCount)
		return Equation{Formula: "P = N Qg V f", Inputs: []Input{{"N", n, "1"}, {"Qg", charge, "C"}, {"V", v, "V"}, {"f", f, "Hz"}}, Source: "charge of the gates, from where the driver takes it"}, n * losses.GateDriveLoss(charge, v, f)
	case losses.Quiescent:
		return Equation{Formula: "P = Vin Iq", Inputs: []Input{{"Vin", vin, "V"}, {"Iq", c.QuiescentCurrent, "A"}}, Source: "definition"}, losses.QuiescentLoss(vin, c.QuiescentCurrent)
	case losses.Auxiliary:
		return Equation{Formula: "P = Paux", Inputs: []Input{{"Paux", c.AuxiliaryPower, "W"}}, Source: "given"}, c.AuxiliaryPower
	}
	return Equation{}, math.NaN()
}

// board explains the copper paths and the source.
func (x *explainer) board(m losses.Mechanism) (Equation, float64) {
	b := &x.s.Board
	warm, _ := parts.CopperMultiplier(x.op.BoardDegC)
	path := func(r, i float64) (Equation, float64) {
		return Equation{Formula: "P = R k I²", Inputs: []Input{{"R", r, "Ohm"}, {"k", warm, "1"}, {"I", i, "A"}}, Source: "copper at the board's temperature"}, losses.Resistive(r*warm, i*i)
	}
	switch m {
	case losses.InputPath:
		return path(b.InputPath, x.op.PathMean)
	case losses.OutputPath:
		return path(b.OutputPath, x.op.LoadRMS)
	case losses.SwitchNodePath:
		n := float64(x.s.PhaseCount)
		e, one := x.mean("P = N Rsw k IL,rms²", []Input{{"N", n, "1"}, {"Rsw", b.SwitchNodePath, "Ohm"}, {"k", warm, "1"}}, "copper at the board's temperature", func(p *phase) ([]Input, float64) {
			i := p.leg.Inductor.RMS
			return []Input{{"IL,rms", i, "A"}}, losses.Resistive(b.SwitchNodePath*warm, i*i)
		})
		return e, n * one
	case losses.SourcePath:
		r, i := x.p.SourceResistance, x.op.PathMean
		return Equation{Formula: "P = Rs I²", Inputs: []Input{{"Rs", r, "Ohm"}, {"I", i, "A"}}, Source: "Ohm's law in the source"}, losses.Resistive(r, i*i)
	}
	return Equation{}, math.NaN()
}

func (x *explainer) capacitor(p losses.Part) (Equation, float64) {
	banks, current := x.s.InputCapacitors, &x.op.InputBank
	k := int(p) - int(losses.InputCapacitor)
	if p < losses.InputCapacitor {
		banks, current = x.s.OutputCapacitors, &x.op.Solution.BankRMS
		k = int(p) - int(losses.OutputCapacitor)
	}
	r, _ := banks[k].ESRAt(x.at[p], x.p.AgeRatio)
	i := current[k]
	return Equation{Formula: "P = ESR Irms²", Inputs: []Input{{"ESR", r, "Ohm"}, {"Irms", i, "A"}}, Source: "Ohm's law, resistance and current of the whole bank"}, losses.Resistive(r, i*i)
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
