package evaluate

import (
	"railproof/calc/losses"
	"railproof/calc/parts"
	"railproof/calc/stage"
	"railproof/calc/switched"
)

const (
	// maxPasses bounds the joint iteration. One or two passes are usual; a stage just
	// below runaway or on a kink of its saturation curve takes more.
	maxPasses = 80
	// coldPasses is how often the closed form is followed before the circuit is
	// solved: the first time bridge voltage and temperatures are far off. From an
	// anchor they are not, and nearPasses do.
	coldPasses, nearPasses = 2, 1
	// thermalSteps is how many Newton steps temperatures take on one circuit
	// solution before the circuit is solved again: a second one where the first
	// crossed a point of a table. On the closed form they take one.
	thermalSteps = 2
	// refineKelvin is the length of a step after which the slopes are still good.
	refineKelvin = 10 // [K]
	// temperatureTolerance is how far [K] the temperatures that the circuit was solved
	// with may be from the equilibrium, half of the thousandth of a kelvin that is
	// promised. Those that are told have one Newton step more, which leaves a
	// thousandth of it.
	temperatureTolerance = 5e-4
	// dutyTolerance is the relative step of the duty ratio at which the output is
	// regulated, restTolerance that of a current that rests, where the output moves
	// with up to the square of it.
	dutyTolerance, restTolerance = 1e-9, 2e-10
	// polishReach is the longest of those steps that the settled circuit still takes:
	// what follows from the currents moves as little.
	polishReach = 1e-6
	// startTolerance is the relative change of the inductance after which the closed
	// form of a current that rests is followed once more: all of it scales with the
	// inductance, not the ripple alone.
	startTolerance = 1e-4
	// maxPolish bounds the last steps to it, each of which gains three digits.
	maxPolish = 6
	// circuitTolerance is the relative change of inductance and bridge voltage at
	// which the circuit is the one that its own currents ask for.
	circuitTolerance = 1e-7
)

// operating is the state of one evaluation while it runs.
type operating struct {
	point        *stage.Point
	held         bool       // parts are held at a temperature
	copper       float64    // [1] multiplier of the board's copper
	output       float64    // [V] regulated voltage, or the mean that a fixed duty ratio gives
	bias         float64    // [V] mean output voltage, also where it is not the regulated one
	duty         float64    // [1] fixed duty ratio; negative: regulated
	bridge       float64    // [V]
	charged      [2]float64 // [V] bridge and output voltage for which charges and rates are computed
	path         float64    // [ohm] source and input path
	turns        int        // that the bridge voltage has taken
	before       float64    // [V] it before the last of them
	asked        float64    // [V] what that came to
	input        float64    // [A] mean current through them
	least, most  float64    // [1] duty ratios that the controller can make
	deadTimeDuty float64    // [1]
	closedPasses int        // on the closed form
	refine       bool       // the last thermal step was short
	near         *Anchor
}

// Eval computes the stage at a point, into r. It allocates nothing, and the
// answer depends on stage and point only.
//
// Duty ratio, currents, inductance over the swing, bridge voltage and every
// part's temperature depend on each other; a joint iteration finds them, from a
// closed form. Each pass solves the circuit exactly, then moves temperatures by
// Newton steps on the frozen currents. It ends when the circuit that was solved
// is the one that its own currents and temperatures ask for.
func (e *Evaluator) Eval(p *stage.Point, r *Result) {
	var o operating
	e.run(nil, p, &o, r)
}

// run evaluates from an anchor; nil: from cold.
func (e *Evaluator) run(a *Anchor, p *stage.Point, o *operating, r *Result) Status {
	e.begin(p, o)
	if a != nil && !o.held {
		e.beginNear(a, o)
	} else {
		e.beginCold(o)
	}
	status := e.iterate(o)
	e.operation.PathMean, e.operation.LoadRMS = o.input, e.loadRMS()
	e.fill(o, status, r)
	return status
}

func (e *Evaluator) begin(p *stage.Point, o *operating) {
	s := e.stage
	*o = operating{point: p, duty: -1, bridge: p.Input, closedPasses: coldPasses}
	board := p.AmbientDegC
	start := p.AmbientDegC
	if parts.Known(p.PartTemperatureDegC) {
		o.held = true
		board, start = p.PartTemperatureDegC, p.PartTemperatureDegC
	} else {
		e.setNetwork()
	}
	o.copper, _ = parts.CopperMultiplier(board)
	for i := range e.degC {
		e.degC[i] = start
	}
	e.setLoad(p.Load, o.copper)
	e.model.Begin(p.AgeRatio)
	e.setAged(p.AgeRatio)
	o.path = p.SourceResistance + s.Board.InputPath*o.copper
	switch p.Control.Kind {
	case stage.RegulateTo:
		o.output = p.Control.Voltage
	case stage.ByFeedback:
		o.output = s.Feedback.OutputVoltage()
	case stage.FixedDuty:
		o.duty = p.Control.Duty
		o.output = o.duty * p.Input
	}
	o.bias = o.output
	e.operation = losses.Operation{AgeRatio: p.AgeRatio, BoardDegC: board, Solution: &e.solution}
	if len(s.Phases) > 0 {
		e.operation.Inductances = &e.inductance
	}
}

// beginCold starts with the inductance at the mean current.
func (e *Evaluator) beginCold(o *operating) {
	l, phases := &e.stage.Inductor, e.stage.PhaseCount
	bent := 1.0
	if l.Saturates() {
		i := (e.circuit.Current + e.circuit.Conductance*o.output) / float64(phases)
		bent = l.IncrementalAt(i) / l.Inductance
	}
	for k := range phases {
		e.inductance[k] = e.nominalInductance(k) * bent
	}
}

// beginNear starts from an anchor.
func (e *Evaluator) beginNear(a *Anchor, o *operating) {
	o.closedPasses, o.near = nearPasses, a
	o.bridge = o.point.Input * (1 - a.drop)
	e.network.Temperatures(o.point.AmbientDegC, &a.power, &e.degC)
	for k := range e.inductance[:e.stage.PhaseCount] {
		e.inductance[k] = e.nominalInductance(k) * a.inductance[k]
	}
}

// nominalInductance is that of phase k without current [H].
func (e *Evaluator) nominalInductance(k int) float64 {
	if s := e.stage; len(s.Phases) > 0 && parts.Known(s.Phases[k].Inductance) {
		return s.Phases[k].Inductance
	}
	return e.stage.Inductor.Inductance
}

// iterate runs the joint iteration and returns its status.
func (e *Evaluator) iterate(o *operating) Status {
	e.followClosedForm(o)
	for range maxPasses {
		e.setCircuit(o.bridge, o.copper)
		e.setBanks(o.bridge, o.bias)
		e.limitDuty(o)
		dutyChange := e.solve(o)
		status := fromSwitched(e.solution.Status)
		if status == NoOperatingPoint || status == NotConverged {
			return status
		}
		if !e.share() {
			return NotConverged
		}
		before := e.degC
		circuitChange := max(e.followInductance(), e.followOutput(o, status == OK))
		temperatureChange, runaway := e.followLosses(o, thermalSteps)
		if runaway {
			return Runaway
		}
		circuitChange = max(circuitChange, e.followBridge(o))
		if o.exhausted() {
			return NoOperatingPoint
		}
		if circuitChange <= circuitTolerance && temperatureChange <= temperatureTolerance && dutyChange <= polishReach {
			e.hottest, e.degC = e.degC, before
			if dutyChange > e.dutyTolerance() {
				e.polish(o)
				status = fromSwitched(e.solution.Status)
			}
			return e.settled(o, status)
		}
	}
	return NotConverged
}

// followClosedForm brings everything near to its place on the closed form of the
// currents.
func (e *Evaluator) followClosedForm(o *operating) {
	first := e.degC
	for left := o.closedPasses; left > 0; left-- {
		e.setCircuit(o.bridge, o.copper)
		e.setBanks(o.bridge, o.bias)
		load := e.circuit.Current + e.circuit.Conductance*o.output
		e.start(&e.circuit, o.output, load, o.duty)
		if left == 1 && e.followInductance() > startTolerance && e.solution.Leg.Mode == switched.Discontinuous {
			e.circuit.Leg.L = e.inductance[0]
			e.start(&e.circuit, o.output, load, o.duty)
			e.followInductance()
		}
		e.shareStart()
		e.followOutput(o, true)
		if _, runaway := e.followLosses(o, 1); runaway {
			e.degC = first // the closed form's currents decide nothing
			return
		}
		before := o.bridge
		e.followBridge(o)
		if o.near != nil {
			for _, p := range e.parts {
				e.degC[p] += o.near.perVolt[p] * (o.bridge - before)
			}
		}
	}
}

// solve solves the circuit at the given duty ratio, or makes one step towards the
// regulated output, whose distance it returns as a relative change of the duty
// ratio.
func (e *Evaluator) solve(o *operating) (dutyChange float64) {
	if o.duty >= 0 {
		e.solver.FixedDuty(&e.circuit, o.duty, &e.solution)
		return 0
	}
	return e.solver.Approach(&e.circuit, o.output, o.least, o.most, &e.solution)
}

// polish brings the output of the settled circuit, at most polishReach away, to the
// regulated voltage. What is told follows from the last solution, so that the sum of the
// losses stays exact.
func (e *Evaluator) polish(o *operating) {
	for range maxPolish {
		if e.solve(o) <= e.dutyTolerance() {
			e.followInductance()
			if !e.share() {
				break
			}
			e.model.Freeze(&e.operation)
			return
		}
	}
	e.solution.Status = switched.NotConverged
}

func (e *Evaluator) dutyTolerance() float64 {
	if e.solution.Leg.Mode == switched.Discontinuous {
		return restTolerance
	}
	return dutyTolerance
}

// settled tells what the temperatures of a converged point mean.
func (e *Evaluator) settled(o *operating, status Status) Status {
	if o.held || !status.Figures() {
		return status
	}
	if e.operation.Inductances != nil && !e.settlePhases(o) {
		return Runaway
	}
	if !e.stable() {
		return Runaway
	}
	if status == OK && e.tooHot() {
		return OverTemperature
	}
	return status
}

// stable reports whether the equilibrium is one, with the figure that says how much
// unless that is spared.
func (e *Evaluator) stable() bool {
	if e.spared {
		return e.network.Stable(&e.slope)
	}
	e.feedback, _ = e.network.Feedback(&e.slope)
	return e.feedback < 1
}

func fromSwitched(s switched.Status) Status {
	switch s {
	case switched.Solved:
		return OK
	case switched.DropOut:
		return DropOut
	case switched.TooShortOnTime:
		return TooShortOnTime
	case switched.NoOperatingPoint:
		return NoOperatingPoint
	}
	return NotConverged
}

// limitDuty finds the duty ratios that the controller's times allow, less what
// dead time adds to the duty ratio that it must command.
//
//	ΔD = 2 td f (Vsd − I Rls)/Vin
func (e *Evaluator) limitDuty(o *operating) {
	c, f := &e.stage.Controller, e.stage.SwitchingFrequency
	o.deadTimeDuty = 0
	if e.synchronous() {
		i := e.solution.Leg.Inductor.Mean
		o.deadTimeDuty = 2 * c.DeadTime * f * (e.stage.LowSide.BodyDiode - i*e.circuit.Leg.Rectifier.Slope) / o.bridge
	}
	o.least = max(0, f*c.MinOnTime-o.deadTimeDuty)
	o.most = min(1, min(c.MaxDutyRatio, 1-f*c.MinOffTime)-o.deadTimeDuty)
}
