package evaluate

import (
	"math"

	"railproof/calc/losses"
	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/stage"
	"railproof/calc/switched"
)

// tooHot reports whether a part lies above its rated temperature.
func (e *Evaluator) tooHot() bool {
	s := e.stage
	above := func(p losses.Part, rating float64) bool { return e.hottest[p] > rating }
	if above(losses.HighSide, s.HighSide.Rating.JunctionDegC) ||
		above(losses.Inductor, s.Inductor.Rating.WindingDegC) ||
		above(losses.Controller, s.Controller.Rating.JunctionDegC) {
		return true
	}
	if e.synchronous() && above(losses.LowSide, s.LowSide.Rating.JunctionDegC) ||
		!e.synchronous() && above(losses.Diode, s.Diode.Rating.JunctionDegC) {
		return true
	}
	for k := range s.OutputCapacitors {
		if above(losses.OutputCapacitor+losses.Part(k), s.OutputCapacitors[k].Rating.TemperatureDegC) {
			return true
		}
	}
	for k := range s.InputCapacitors {
		if above(losses.InputCapacitor+losses.Part(k), s.InputCapacitors[k].Rating.TemperatureDegC) {
			return true
		}
	}
	return false
}

// blank is a vector on which nothing has been written.
var blank = func() (v quantity.Vector) {
	for i := range v {
		v[i] = math.NaN()
	}
	return v
}()

// fill writes the result. Where no figures exist it holds the status alone.
func (e *Evaluator) fill(o *operating, status Status, r *Result) {
	r.Status, r.Mode, r.AtBorder = status, e.solution.Leg.Mode, e.atBorder()
	r.Quantities = blank
	r.Losses.N = 0
	for p := range r.PartDegC {
		r.PartDegC[p] = math.NaN()
	}
	if !status.Figures() {
		r.Mode, r.AtBorder = switched.NoMode, false
		return
	}
	for _, p := range e.parts {
		r.PartDegC[p] = e.hottest[p]
	}
	q := &r.Quantities
	e.fillWaveforms(o, q)
	e.fillTimes(o, q)
	e.fillPowers(o, r)
	e.fillParts(o, r)
}

// BoundaryBand is how near to the border of conduction a point is called boundary: a
// valley of at most this part of the current swing, or a rest at zero of at most
// this part of the period.
const BoundaryBand = 1e-3 // [1]

// atBorder reports whether the rectifier blocks reverse current and the inductor
// current hardly leaves zero, or hardly rests there.
func (e *Evaluator) atBorder() bool {
	if e.stage.Rectifier == stage.Synchronous {
		return false
	}
	leg, duty := &e.solution.Leg, e.solution.Duty
	if !(duty > 0 && duty < 1) {
		return false
	}
	if leg.Mode == switched.Discontinuous {
		return 1-duty-leg.Conduct <= BoundaryBand
	}
	return leg.Valley <= BoundaryBand*(leg.Peak-leg.Valley)
}

// Conduction returns the conduction mode as it is told: boundary at the border of
// the two.
func (r *Result) Conduction() switched.Mode {
	if r.AtBorder {
		return switched.Boundary
	}
	return r.Mode
}

func (e *Evaluator) fillWaveforms(o *operating, q *quantity.Vector) {
	sol := &e.solution
	e.solver.OutputRange(sol)
	leg := e.worstLeg()
	q[quantity.OutputMean] = sol.OutputMean
	q[quantity.OutputRipplePP] = sol.OutputMax - sol.OutputMin
	q[quantity.OutputRippleWithESLPP] = sol.OutputMax - sol.OutputMin + e.edgeStep(o.bridge)
	q[quantity.InductorMean] = leg.Inductor.Mean
	q[quantity.InductorRMS] = leg.Inductor.RMS
	q[quantity.InductorRipplePP] = leg.Peak - leg.Valley
	q[quantity.InductorPeak], q[quantity.InductorValley] = e.peak, e.valley
	q[quantity.HighSideMean], q[quantity.HighSideRMS] = leg.HighSide.Mean, leg.HighSide.RMS
	q[quantity.RectifierMean], q[quantity.RectifierRMS] = leg.Rectifier.Mean, leg.Rectifier.RMS
	q[quantity.CircuitInputMean] = sol.InputMean
	q[quantity.EnergyBalance] = sol.EnergyBalance
	q[quantity.InductanceEffective] = e.circuit.Leg.L
	q[quantity.BridgeVoltage] = o.bridge
	for k := range e.circuit.Banks {
		q[quantity.OutputCapacitorRMS+quantity.ID(k)] = sol.BankRMS[k]
		q[quantity.OutputCapacitanceEffective+quantity.ID(k)] = e.circuit.Bank[k].C
	}
	q[quantity.InputCapacitorRMS] = math.Sqrt(max(0, sol.InputRMS*sol.InputRMS-sol.InputMean*sol.InputMean))
	if n := len(e.stage.InputCapacitors); n > 0 {
		q[quantity.InputRipplePP] = e.input.RipplePP
		for k := range n {
			q[quantity.InputCapacitorBankRMS+quantity.ID(k)] = e.input.BankRMS[k]
			q[quantity.InputCapacitanceEffective+quantity.ID(k)] = e.inputBank[k].C
		}
	}
	current := e.circuit.Current + e.circuit.Conductance*sol.OutputMean
	q[quantity.LoadVoltage] = sol.OutputMean - e.stage.Board.OutputPath*o.copper*current
	if asked := e.asked(o.point); asked > 0 {
		q[quantity.OutputError] = q[quantity.LoadVoltage]/asked - 1
	}
}

// asked is the output voltage that the point asks for [V]; 0 at a fixed duty
// ratio that names none. A feedback that has drifted still has its typical values
// to answer to.
func (e *Evaluator) asked(p *stage.Point) float64 {
	switch {
	case p.Asked > 0:
		return p.Asked
	case p.Control.Kind == stage.RegulateTo:
		return p.Control.Voltage
	case p.Control.Kind == stage.ByFeedback:
		return e.nominal
	}
	return 0
}

// edgeStep returns the voltage step [V] across the output banks' series
// inductance at each edge, where the inductor's current slope changes by Vin/L.
// Banks are in parallel; one without a series inductance of its own is left out,
// since an unknown value must not hide the others'.
func (e *Evaluator) edgeStep(bridge float64) float64 {
	inverse := 0.0
	for k := range e.stage.OutputCapacitors {
		if esl := e.stage.OutputCapacitors[k].BankESL(); esl > 0 {
			inverse += 1 / esl
		}
	}
	if inverse == 0 {
		return 0
	}
	return bridge / (e.circuit.Leg.L * inverse)
}

// worstLeg returns the phase with the largest RMS current; the one of them all
// where phases are equal.
func (e *Evaluator) worstLeg() *switched.LegSolution {
	worst := &e.solution.Leg
	if e.circuit.Legs == nil {
		return worst
	}
	for k := range e.stage.Phases {
		if leg := &e.solution.Legs[k]; k == 0 || leg.Inductor.RMS > worst.Inductor.RMS {
			worst = leg
		}
	}
	return worst
}

func (e *Evaluator) fillTimes(o *operating, q *quantity.Vector) {
	sol, period := &e.solution, e.circuit.Period
	q[quantity.DutyRatio] = sol.Duty
	q[quantity.DeadTimeDutyRatio] = o.deadTimeDuty
	q[quantity.OnTime] = min(max(sol.Duty+o.deadTimeDuty, 0), 1) * period
	q[quantity.OffTime] = period - q[quantity.OnTime]
	leg, n := &sol.Leg, float64(e.circuit.Phases)
	ripple := leg.Peak - leg.Valley
	if leg.Mode == switched.Discontinuous {
		vf := e.circuit.Leg.Rectifier.Threshold
		ripple = (o.bridge - sol.OutputMean) * (sol.OutputMean + vf) / (o.bridge + vf) * period / e.circuit.Leg.L
	}
	q[quantity.BoundaryLoad] = n * ripple / 2
}

func (e *Evaluator) fillPowers(o *operating, r *Result) {
	q, sol := &r.Quantities, &e.solution
	inside := e.model.Fill(&e.operation, &r.Losses)
	path := e.operation.PathMean * e.operation.PathMean
	if o.point.SourceResistance > 0 {
		r.Losses.Add(losses.Item{Part: losses.Board, Mechanism: losses.SourcePath, Power: o.point.SourceResistance * path, Count: 1, BandLow: 1, BandHigh: 1})
	}
	total := r.Losses.Total()
	outputPath := e.stage.Board.OutputPath * o.copper * e.operation.LoadRMS * e.operation.LoadRMS
	q[quantity.LossTotal] = total
	q[quantity.OutputPower] = sol.OutputPower - outputPath
	q[quantity.InputPower] = sol.InputPower + total - inside
	q[quantity.InputMean] = q[quantity.InputPower] / o.point.Input
	q[quantity.Efficiency] = q[quantity.OutputPower] / q[quantity.InputPower]
}

func (e *Evaluator) fillParts(o *operating, r *Result) {
	q, s := &r.Quantities, e.stage
	var lost [losses.PartCount]float64
	r.Losses.ByPart(&lost)
	set := func(power, temperature quantity.ID, p losses.Part) {
		q[power], q[temperature] = lost[p], e.hottest[p]
	}
	set(quantity.HighSideLoss, quantity.HighSideJunction, losses.HighSide)
	if e.synchronous() {
		set(quantity.LowSideLoss, quantity.LowSideJunction, losses.LowSide)
	} else {
		set(quantity.DiodeLoss, quantity.DiodeJunction, losses.Diode)
	}
	set(quantity.InductorLoss, quantity.InductorWinding, losses.Inductor)
	set(quantity.ControllerLoss, quantity.ControllerJunction, losses.Controller)
	q[quantity.BoardLoss] = lost[losses.Board]
	if core := &s.Inductor.Core; core.Present {
		density, swing := e.model.Core()
		q[quantity.CorePowerDensity], q[quantity.FluxSwing] = density, swing
		q[quantity.CoreLoss] = density * core.Volume
	}
	for k := range s.OutputCapacitors {
		id := quantity.ID(k)
		set(quantity.OutputCapacitorLoss+id, quantity.OutputCapacitorTemperature+id, losses.OutputCapacitor+losses.Part(k))
		q[quantity.OutputCapacitorLife+id] = e.life(o, &s.OutputCapacitors[k], losses.OutputCapacitor+losses.Part(k), e.solution.BankRMS[k])
	}
	for k := range s.InputCapacitors {
		id := quantity.ID(k)
		set(quantity.InputCapacitorLoss+id, quantity.InputCapacitorTemperature+id, losses.InputCapacitor+losses.Part(k))
		q[quantity.InputCapacitorLife+id] = e.life(o, &s.InputCapacitors[k], losses.InputCapacitor+losses.Part(k), e.input.BankRMS[k])
	}
	if !o.held && !e.spared {
		q[quantity.ThermalFeedback] = e.feedback
	}
}

// life returns the expected life [s] of a bank's pieces. Their surroundings are
// what the board and other parts heat them to; the rise above is their ripple's,
// by the data sheet's own rating.
func (e *Evaluator) life(o *operating, c *parts.Capacitor, p losses.Part, rms float64) float64 {
	if !c.HasLife() {
		return math.NaN()
	}
	surroundings := e.degC[p]
	if !o.held {
		_, others := e.network.Rise(int(p), &e.power)
		surroundings = o.point.AmbientDegC + others
	}
	return c.LifeAt(surroundings, c.RippleRise(rms))
}
