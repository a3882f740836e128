package evaluate

import (
	"math"

	"railproof/calc/losses"
	"railproof/calc/parts"
	"railproof/calc/stage"
	"railproof/calc/switched"
	"railproof/calc/thermal"
)

const (
	// maxPasses bounds the joint iteration. Three passes are usual; a stage just
	// below runaway or on a kink of its saturation curve takes more.
	maxPasses = 80
	// coldPasses is how often the closed form is followed before the circuit is
	// solved: the first time bridge voltage and temperatures are far off. From an
	// anchor they are not, and nearPasses do.
	coldPasses, nearPasses = 2, 1
	// thermalSteps is how many Newton steps temperatures take on one circuit
	// solution before the circuit is solved again: a second one where the first
	// crossed a point of a table.
	thermalSteps = 2
	// refineKelvin is the length of a step after which the slopes are still good.
	refineKelvin = 10 // [K]
	// temperatureTolerance is the change [K] of the last Newton step, half of the
	// thousandth of a kelvin that is promised.
	temperatureTolerance = 5e-4
	// dutyTolerance is the relative step of the duty ratio at which the output is
	// regulated.
	dutyTolerance = 1e-9
	// shareTolerance and shareKelvin are the changes of the circuit and of a
	// temperature below which the input banks' shares, once solved, stay: they
	// change by less than that.
	shareTolerance, shareKelvin = 1e-6, 1e-2
	// maxPolish bounds the last steps to it, each of which gains three digits.
	maxPolish = 6
	// circuitTolerance is the relative change of inductance and bridge voltage at
	// which the circuit is the one that its own currents ask for.
	circuitTolerance = 1e-7
)

// operating is the state of one evaluation while it runs.
type operating struct {
	point        *stage.Point
	held         bool    // parts are held at a temperature
	copper       float64 // [1] multiplier of the board's copper
	output       float64 // [V] regulated voltage, or the present mean
	duty         float64 // [1] fixed duty ratio; negative: regulated
	bridge       float64 // [V]
	charged      float64 // [V] bridge voltage for which charges and rates are computed
	path         float64 // [ohm] source and input path
	input        float64 // [A] mean current through them
	least, most  float64 // [1] duty ratios that the controller can make
	deadTimeDuty float64 // [1]
	closedPasses int     // on the closed form
	refine       bool    // the last thermal step was short
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
	e.model.Begin()
	e.setBase(p.AgeRatio)
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
	for k := range e.inductance[:s.PhaseCount] {
		e.inductance[k] = e.nominalInductance(k)
	}
	e.operation = losses.Operation{AgeRatio: p.AgeRatio, BoardDegC: board, Solution: &e.solution}
	if len(s.Phases) > 0 {
		e.operation.Inductances = &e.inductance
	}
}

// beginNear replaces the cold start by the anchor's.
func (e *Evaluator) beginNear(a *Anchor, o *operating) {
	o.closedPasses = nearPasses
	o.bridge = o.point.Input * (1 - a.drop)
	e.network.Temperatures(o.point.AmbientDegC, &a.power, &e.degC)
	for k := range e.inductance[:e.stage.PhaseCount] {
		e.inductance[k] *= a.inductance[k]
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
	first := e.degC
	for range o.closedPasses {
		e.setCircuit(o.bridge, o.copper)
		e.setBanks(o.bridge, o.output)
		load := e.circuit.Current + e.circuit.Conductance*o.output
		e.start(&e.circuit, o.output, load, o.duty)
		e.shareStart()
		if _, _, runaway := e.follow(o); runaway {
			e.degC = first // the closed form's currents decide nothing
			break
		}
	}
	moved := true
	for range maxPasses {
		e.setCircuit(o.bridge, o.copper)
		e.setBanks(o.bridge, o.output)
		e.limitDuty(o)
		dutyChange := e.solve(o)
		status := fromSwitched(e.solution.Status)
		if status == NoOperatingPoint || status == NotConverged {
			return status
		}
		if moved && !e.share() {
			return NotConverged
		}
		before := e.degC
		circuitChange, temperatureChange, runaway := e.follow(o)
		if runaway {
			return Runaway
		}
		moved = circuitChange > shareTolerance || temperatureChange > shareKelvin
		if circuitChange <= circuitTolerance && temperatureChange <= temperatureTolerance {
			e.degC = before
			if dutyChange > dutyTolerance {
				e.polish(o)
				status = fromSwitched(e.solution.Status)
			}
			return e.settled(o, status)
		}
	}
	return NotConverged
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

// polish brings the output of the settled circuit to the regulated voltage. What
// follows from the currents moves by less than the circuit's tolerance; the losses
// take the last solution, so that their sum stays exact.
func (e *Evaluator) polish(o *operating) {
	for range maxPolish {
		if e.solve(o) <= dutyTolerance {
			e.model.Freeze(&e.operation)
			return
		}
	}
	e.solution.Status = switched.NotConverged
}

// settled tells what the temperatures of a converged point mean.
func (e *Evaluator) settled(o *operating, status Status) Status {
	e.hottest = e.degC
	if o.held || !status.Figures() {
		return status
	}
	if e.operation.Inductances != nil && !e.settlePhases(o) {
		return Runaway
	}
	if e.feedback, _ = e.network.Feedback(&e.slope); e.feedback >= 1 {
		return Runaway
	}
	if status == OK && e.tooHot() {
		return OverTemperature
	}
	return status
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
	o.least = math.Max(0, f*c.MinOnTime-o.deadTimeDuty)
	o.most = math.Min(1, math.Min(c.MaxDutyRatio, 1-f*c.MinOffTime)-o.deadTimeDuty)
}

// follow takes the present circuit solution to the inductance, bridge voltage and
// temperatures that it asks for. It returns the largest relative change of the first two, and the largest
// change [K] of a temperature.
func (e *Evaluator) follow(o *operating) (circuitChange, temperatureChange float64, runaway bool) {
	circuitChange = e.followInductance()
	if o.duty >= 0 {
		circuitChange = math.Max(circuitChange, math.Abs(e.solution.OutputMean/o.output-1))
		o.output = e.solution.OutputMean
	}
	op := &e.operation
	op.Bridge, op.Output, op.Inductance = o.bridge, e.solution.OutputMean, e.inductance[0]
	if !(math.Abs(o.bridge-o.charged) <= circuitTolerance*o.bridge) || o.duty >= 0 {
		e.model.Charge(op.Bridge, op.Output)
		o.charged = o.bridge
	}
	e.model.Freeze(op)
	for range thermalSteps {
		e.powerDegC = e.degC
		e.model.Powers(&e.degC, &e.power, &e.slope)
		if o.held {
			break
		}
		change, state := e.warm(o)
		if state == thermal.Runaway {
			return circuitChange, change, true
		}
		temperatureChange += change
		if state == thermal.Stepped && change <= temperatureTolerance {
			break
		}
	}
	return math.Max(circuitChange, e.followBridge(o)), temperatureChange, false
}

// warm moves the temperatures by one Newton step, after a short one with the slopes
// at hand.
func (e *Evaluator) warm(o *operating) (change float64, state thermal.State) {
	if o.refine {
		change, state = e.network.Refine(o.point.AmbientDegC, &e.power, &e.degC)
	} else {
		change, state = e.network.Step(o.point.AmbientDegC, &e.power, &e.slope, &e.degC)
	}
	o.refine = state == thermal.Stepped && change < refineKelvin
	return change, state
}

// followInductance reads valley and peak from the flux curve and returns the
// relative change of the inductance over the swing.
func (e *Evaluator) followInductance() float64 {
	l := &e.stage.Inductor
	if e.operation.Inductances != nil {
		return e.followInductances()
	}
	one := &e.solution.Leg
	e.valley, e.peak = one.Valley, one.Peak
	if !l.Saturates() || !(one.Peak > one.Valley) {
		return 0
	}
	e.valley, e.peak = e.swing(l, one, e.inductance[0])
	next := e.inductance[0] * (one.Peak - one.Valley) / (e.peak - e.valley)
	change := math.Abs(next/e.inductance[0] - 1)
	e.inductance[0] = next
	return change
}

// valleyJoin is how many times the straight waveform's valley the flux curve's may
// be where current cannot reverse: both reach zero together, at the border of
// conduction. A current on a falling inductance has its valley higher, so the limit
// acts within about that difference of the border.
const valleyJoin = 3.0 // [1]

// swing returns the currents between which the flux of the solved waveform moves
// the inductor: that flux over their difference is the inductance over the swing.
func (e *Evaluator) swing(l *parts.Inductor, leg *switched.LegSolution, inductance float64) (valley, peak float64) {
	flux := inductance * (leg.Peak - leg.Valley)
	if leg.Mode == switched.Discontinuous {
		return 0, l.CurrentAtFlux(flux)
	}
	valley, peak = l.SwingAbout(leg.Inductor.Mean, flux)
	if join := valleyJoin * leg.Valley; e.circuit.Leg.Rectifier.Blocks && valley > join {
		return join, l.CurrentAtFlux(l.FluxLinkage(join) + flux)
	}
	return valley, peak
}

func (e *Evaluator) followInductances() (change float64) {
	e.valley, e.peak = math.Inf(1), math.Inf(-1)
	for k := range e.stage.Phases {
		l := e.stage.Inductor
		if o := &e.stage.Phases[k]; parts.Known(o.Inductance) {
			l.Inductance = o.Inductance
		}
		leg := &e.solution.Legs[k]
		valley, peak := leg.Valley, leg.Peak
		if l.Saturates() && peak > valley {
			valley, peak = e.swing(&l, leg, e.inductance[k])
			next := e.inductance[k] * (leg.Peak - leg.Valley) / (peak - valley)
			change = math.Max(change, math.Abs(next/e.inductance[k]-1))
			e.inductance[k] = next
		}
		e.valley, e.peak = math.Min(e.valley, valley), math.Max(e.peak, peak)
	}
	return change
}

// followBridge solves source and input path for the mean input current and
// returns the relative change of the bridge voltage.
//
//	Vb = Vin − R I,  I = P/Vb
//
// P is what the stage takes at the bridge: everything lost in its parts, at the
// temperatures that they have just been moved to, and everything delivered.
func (e *Evaluator) followBridge(o *operating) float64 {
	power := e.solution.OutputPower
	for _, p := range e.parts {
		power += e.weight[p] * (e.power[p] + e.slope[p]*(e.degC[p]-e.powerDegC[p]))
	}
	rms := e.solution.Leg.Inductor.RMS
	power += float64(e.stage.PhaseCount) * e.stage.Board.SwitchNodePath * o.copper * rms * rms
	o.input = power / o.bridge
	next := o.point.Input - o.path*o.input
	change := math.Abs(next/o.bridge - 1)
	o.bridge = math.Max(next, o.point.Input*leastBridge)
	return change
}

// leastBridge keeps the bridge voltage of a source that cannot supply the load
// above zero; such a point ends in drop-out.
const leastBridge = 1e-2 // [1] of the source's voltage

// loadRMS returns the RMS current through the output path: the load's, which
// carries ripple where it is a resistor.
func (e *Evaluator) loadRMS() float64 {
	c, sol := &e.circuit, &e.solution
	if c.Conductance == 0 || sol.OutputMean <= 0 {
		return c.Current
	}
	// OutputPower = G <v²> + I0 <v> yields the mean square of the voltage.
	square := (sol.OutputPower - c.Current*sol.OutputMean) / c.Conductance
	g := c.Conductance
	return math.Sqrt(g*g*square + 2*g*c.Current*sol.OutputMean + c.Current*c.Current)
}
