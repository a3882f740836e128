package evaluate

import (
	"math"

	"railproof/calc/parts"
	"railproof/calc/switched"
	"railproof/calc/thermal"
)

// followOutput takes the mean output voltage from the present solution, if it does not
// have the regulated one, and returns its relative change.
func (e *Evaluator) followOutput(o *operating, regulated bool) float64 {
	mean := e.solution.OutputMean
	if o.duty >= 0 {
		o.output = mean
	} else if regulated {
		mean = o.output
	}
	change := math.Abs(mean/o.bias - 1)
	o.bias = mean
	return change
}

// followLosses takes the present circuit solution to the temperatures that it asks
// for, by at most the given number of Newton steps, and returns the largest change [K].
func (e *Evaluator) followLosses(o *operating, steps int) (temperatureChange float64, runaway bool) {
	op := &e.operation
	op.Bridge, op.Output, op.Inductance = o.bridge, e.solution.OutputMean, e.inductance[0]
	if !(near(op.Bridge, o.charged[0]) && near(op.Output, o.charged[1])) {
		e.model.Charge(op.Bridge, op.Output)
		o.charged = [2]float64{op.Bridge, op.Output}
	}
	e.model.Freeze(op)
	for step := range steps {
		if step > 0 {
			e.model.Warm(&e.degC)
		}
		e.powerDegC = e.degC
		e.model.Powers(&e.power, &e.slope)
		if o.held {
			break
		}
		change, state := e.heat(o)
		if state == thermal.Runaway {
			return change, true
		}
		temperatureChange += change
		if state == thermal.Stepped && change <= temperatureTolerance {
			break
		}
	}
	return temperatureChange, false
}

// near reports whether a voltage is another within the circuit's tolerance.
func near(v, other float64) bool { return math.Abs(v-other) <= circuitTolerance*v }

// heat moves the temperatures by one Newton step, after a short one with the slopes
// at hand.
func (e *Evaluator) heat(o *operating) (change float64, state thermal.State) {
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
			change = max(change, math.Abs(next/e.inductance[k]-1))
			e.inductance[k] = next
		}
		e.valley, e.peak = min(e.valley, valley), max(e.peak, peak)
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
	before, asked := o.bridge, next
	if o.turns++; o.turns > plainTurns {
		if slope := (next - o.asked) / (o.bridge - o.before); slope < mostSlope {
			next = o.bridge + (next-o.bridge)/(1-slope)
		}
	}
	o.before, o.asked = before, asked
	o.bridge = max(next, o.point.Input*leastBridge)
	return change
}

const (
	// plainTurns is how often the bridge voltage is taken as it comes out. A source
	// that the load nearly exhausts then goes on by secants: what a resistor takes in
	// drop-out falls with the voltage and makes plain turns swing without end.
	plainTurns = 4
	mostSlope  = 0.9 // [1] of the secant; steeper ones lead nowhere
)

// leastBridge keeps the bridge voltage of a source that cannot supply the load above
// zero. A load that shrinks with the voltage ends in drop-out, above it.
const leastBridge = 1e-2 // [1] of the source's voltage

// exhausted reports whether the source cannot supply what the load takes at any
// voltage.
func (o *operating) exhausted() bool {
	least := o.point.Input * leastBridge
	return o.before <= least && o.bridge <= least
}

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
