package evaluate

import (
	"slices"

	"railproof/calc/losses"
	"railproof/calc/parts"
	"railproof/calc/stage"
	"railproof/calc/switched"
	"railproof/calc/thermal"
)

// Evaluator computes operating points of one stage. It owns all the memory that
// an evaluation needs; use one per goroutine.
type Evaluator struct {
	stage   *stage.Stage
	nominal float64 // [V] output voltage that the feedback's typical values set
	model   losses.Model
	network thermal.Network
	parts   []losses.Part             // that the stage has, board apart
	weight  [losses.PartCount]float64 // [1] how often a part's power counts

	solver    *switched.Solver // by far the largest part; kept by Reset
	circuit   switched.Circuit
	legs      [switched.MaxPhases]switched.Leg
	solution  switched.Solution
	operation losses.Operation
	inputBank [switched.MaxBanks]switched.Bank
	aged      agedBanks
	warm      *losses.Elements // at the temperatures of the circuit

	degC, power, slope thermal.Vector
	powerDegC          thermal.Vector              // [degC] at which power holds
	hottest            thermal.Vector              // [degC] of the parts, of unequal phases the hottest
	feedback           float64                     // [1] gain of the loop from temperature to loss and back
	spared             bool                        // it is not told
	inductance         [switched.MaxPhases]float64 // [H] over the present swing
	valley, peak       float64                     // [A] from the flux curve
	input              switched.InputSolution
}

// Prepare readies an evaluator for a stage that has passed Check. It works on a
// copy of its own, whose numbers a caller may change through Stage.
func Prepare(s *stage.Stage) *Evaluator {
	e := &Evaluator{solver: new(switched.Solver)}
	e.Reset(s)
	return e
}

// Reset readies the evaluator for another stage, as Prepare does, in the memory
// that it has.
func (e *Evaluator) Reset(s *stage.Stage) {
	*e = Evaluator{stage: s.Clone(), solver: e.solver}
	if s.Feedback.Present {
		e.nominal = s.Feedback.OutputVoltage()
	}
	prepareTables(e.stage)
	e.model.Prepare(e.stage)
	e.prepareNetwork()
}

// prepareTables readies every table that evaluation reads.
func prepareTables(s *stage.Stage) {
	for _, m := range []*parts.MOSFET{&s.HighSide, &s.LowSide} {
		m.OnResistanceTemp.Prepare()
		m.OnResistanceDrive.Prepare()
		m.OutputChargeTable.Prepare()
	}
	s.Inductor.InductanceAtCurrent.Prepare()
	s.Inductor.Core.Temp.Prepare()
	for _, banks := range [][]parts.Capacitor{s.OutputCapacitors, s.InputCapacitors} {
		for k := range banks {
			c := &banks[k]
			c.CapacitanceAtBias.Prepare()
			c.CapacitanceTemp.Prepare()
			c.ESRTemp.Prepare()
		}
	}
}

// SpareFeedback leaves the thermal feedback out of the results until the next Reset.
// Whether there is runaway is told as before, by a bound where that is enough.
func (e *Evaluator) SpareFeedback() { e.spared = true }

// Stage returns the evaluator's own stage. Its numbers may be set between
// evaluations; its tables, topology, counts and exponents may not.
func (e *Evaluator) Stage() *stage.Stage { return e.stage }

// Circuit returns the switched circuit of the last evaluation, with every
// element at its temperature, bias and current.
func (e *Evaluator) Circuit() *switched.Circuit { return &e.circuit }

// Solution returns the periodic steady state of the last evaluation.
func (e *Evaluator) Solution() *switched.Solution { return &e.solution }

// Operation returns what the losses of the last evaluation follow from besides the
// parts' temperatures.
func (e *Evaluator) Operation() *losses.Operation { return &e.operation }

// CircuitDegC returns the temperatures [degC] of the parts that the last circuit
// was solved with, of unequal phases those of the mean.
func (e *Evaluator) CircuitDegC() *thermal.Vector { return &e.degC }

// InputBanks returns the input capacitor banks of the last evaluation, each at its
// temperature, bias and age.
func (e *Evaluator) InputBanks() []switched.Bank {
	return e.inputBank[:len(e.stage.InputCapacitors)]
}

func (e *Evaluator) synchronous() bool { return e.stage.Rectifier != stage.DiodeRectified }

// prepareNetwork lays out the thermal network: which parts there are and which
// heat each other. Parts of one phase heat parts of the same phase; what all
// phases share is heated by each of them.
func (e *Evaluator) prepareNetwork() {
	s := e.stage
	phases := float64(s.PhaseCount)
	e.network.Reset()
	add := func(p losses.Part, weight float64) {
		e.network.Add(int(p), 0)
		e.parts = append(e.parts, p)
		e.weight[p] = weight
	}
	add(losses.HighSide, phases)
	if e.synchronous() {
		add(losses.LowSide, phases)
	} else {
		add(losses.Diode, phases)
	}
	add(losses.Inductor, phases)
	add(losses.Controller, 1)
	for k := range s.OutputCapacitors {
		add(losses.OutputCapacitor+losses.Part(k), 1)
	}
	for k := range s.InputCapacitors {
		add(losses.InputCapacitor+losses.Part(k), 1)
	}
	// The controller's loss does not rise with temperature: coupled first, it costs the
	// elimination nothing.
	controller := losses.Controller.String()
	couplings := slices.Clone(s.ThermalCouplings)
	slices.SortStableFunc(couplings, func(x, y stage.ThermalCoupling) int {
		involves := func(c stage.ThermalCoupling) int {
			if c.A == controller || c.B == controller {
				return 0
			}
			return 1
		}
		return involves(x) - involves(y)
	})
	for _, c := range couplings {
		a, okA := losses.PartByName(c.A)
		b, okB := losses.PartByName(c.B)
		if !okA || !okB || e.weight[a] == 0 || e.weight[b] == 0 {
			continue
		}
		ontoA, ontoB := c.Resistance, c.Resistance
		if e.weight[a] == 1 {
			ontoA *= e.weight[b]
		}
		if e.weight[b] == 1 {
			ontoB *= e.weight[a]
		}
		e.network.Couple(int(a), int(b), ontoA, ontoB)
	}
}

// setNetwork puts the present resistances to ambient into the network. A
// capacitor's is that of one piece, which carries its share of the bank's loss.
func (e *Evaluator) setNetwork() {
	s, n := e.stage, &e.network
	n.SetSelf(int(losses.HighSide), s.HighSide.Thermal.JunctionToAmbient)
	if e.synchronous() {
		n.SetSelf(int(losses.LowSide), s.LowSide.Thermal.JunctionToAmbient)
	} else {
		n.SetSelf(int(losses.Diode), s.Diode.Thermal.JunctionToAmbient)
	}
	n.SetSelf(int(losses.Inductor), s.Inductor.Thermal.JunctionToAmbient)
	n.SetSelf(int(losses.Controller), s.Controller.Thermal.JunctionToAmbient)
	for k := range s.OutputCapacitors {
		n.SetSelf(int(losses.OutputCapacitor)+k, bankToAmbient(&s.OutputCapacitors[k]))
	}
	for k := range s.InputCapacitors {
		n.SetSelf(int(losses.InputCapacitor)+k, bankToAmbient(&s.InputCapacitors[k]))
	}
}

func bankToAmbient(c *parts.Capacitor) float64 { return c.Thermal.JunctionToAmbient / c.Pieces() }
