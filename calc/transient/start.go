package transient

import (
	"math"

	"railproof/calc/loop"
	"railproof/calc/statespace"
	"railproof/calc/switched"
)

// starter is the workspace of the search for a start.
type starter struct {
	model  loop.Sampled
	solver switched.Solver
}

// begin puts the engine into the start of its run.
func (e *Engine) begin() {
	e.rateIndex()
	s := &e.setup
	f := &s.Plant.Feedback
	e.run.target, e.run.band = f.OutputVoltage(), s.Band
	e.run.least, e.run.most = math.Inf(1), math.Inf(-1)
	e.startMean = math.NaN()
	if s.Start.Kind == AtRest {
		e.fromRest()
	} else if !e.fromPeriodic() {
		e.status = NoStart
		return
	}
	e.run.start(e, noEvent)
}

// inputs sets the inputs of the run's start.
func (e *Engine) inputs(z *statespace.Point) {
	n, c := e.joint.N, &e.joint.Circuit
	z[n+loop.InputLoad], z[n+loop.InputVoltage], z[n+loop.InputOne] = c.Current, c.Vin, 1
	z[n+loop.InputReference] = e.setup.Plant.Feedback.Reference
	if e.joint.ToneRate != 0 {
		z[e.joint.Tone+1] = e.toneAmplitude()
	}
}

func (e *Engine) toneAmplitude() float64 {
	for _, v := range e.setup.Events {
		if v.Kind.tone() {
			return v.Change
		}
	}
	return 0
}

// fromRest starts with a precharged output and nothing moving.
func (e *Engine) fromRest() {
	s, j, m := &e.setup, &e.joint, &e.now
	c := &j.Circuit
	e.inputs(&m.z)
	m.z[j.N+loop.InputReference] = 0
	m.z[j.N+loop.InputLoad] = 0
	m.waits = c.Current != 0
	for k := range c.Banks {
		m.z[j.Bank+k] = s.Start.Precharge
	}
	shunts := j.Network - s.Plant.Source.Shunts
	for k := range s.Plant.Source.Shunts {
		m.z[shunts+k] = c.Vin
	}
	rest := loop.Rest(&s.Plant.Compensator, &s.Plant.Feedback, s.Start.Precharge, s.Bounds.ControlLow)
	copy(m.z[j.Network:j.Integral], rest[:])
	m.drive, m.soft = loop.HeldLow, true
	for i := range c.Phases {
		m.legs[i] = loop.Idle
		m.phases[i] = phase{clock: e.clock(i, 0), count: 0, off: math.Inf(1)}
	}
}

// fromPeriodic starts in the periodic closed-loop solution: that of the linearised
// model, closed on the engine's own map over one period by Newton's method. The
// present moment ends at the clock of phase 0 and time 0.
//
// The map is taken from a quiet time, half-way between a turn-off and the next
// decision of a comparator. There no decision waits for its delay, so that the moment
// that closes is one of the states alone.
func (e *Engine) fromPeriodic() bool {
	if !e.linearise() {
		return false
	}
	e.trial = true
	defer func() { e.trial = false }()
	events := e.points
	e.points = nil // none of them during the search
	defer func() { e.points = events }()

	c := &e.joint.Circuit
	d := e.model.Decision()
	e.placeAt(&d)
	e.advance(d.At + d.Quiet)
	if e.status != Running {
		return false
	}
	before := e.now
	if !e.shoot() {
		e.status, e.now = Running, before
		if !e.relax() {
			return false
		}
	}
	settled := e.lastMean
	e.advance(e.now.phases[0].clock)
	e.rewind(int(math.Round(e.now.at / c.Period)))
	if !e.restless {
		settled = e.lastMean
	}
	e.startMean, e.run.target = settled, settled
	if e.joint.ToneRate != 0 {
		e.now.z[e.joint.Tone], e.now.z[e.joint.Tone+1] = 0, e.toneAmplitude()
	}
	return e.status == Running
}

const (
	referenceRounds = 8     // [1] two or three are usual
	referenceWithin = 1e-13 // [1] of the reference
)

// linearise sets the model to the periodic solution for the reference that there is.
// That of the operating point needs a little more where the amplifier's direct gain
// is finite; the output that is off by as much needs it no longer.
//
// Unequal phases may have no such solution, as where one of them leaves out pulses:
// then it is that of phases which all are as the first, to begin with.
func (e *Engine) linearise() bool {
	p := e.setup.Plant
	if e.refer(&p) {
		return true
	}
	p = e.setup.Plant
	c := &p.Circuit
	if c.Legs == nil {
		return false
	}
	c.Leg, c.Legs = c.Legs[0], nil
	var s switched.Solution
	e.solver.Regulated(c, p.Output, 0, 1, &s)
	p.Operate(&s)
	return s.Status.OK() && e.refer(&p)
}

// refer moves the plant to where its loop needs the reference that there is, and sets
// the model there.
func (e *Engine) refer(p *loop.Plant) bool {
	var s switched.Solution
	for range referenceRounds {
		if !e.model.Set(p).OK() {
			return false
		}
		if p.Source.Present || math.Abs(e.model.Error) <= referenceWithin {
			break // behind a source the circuit alone does not tell the duty ratio
		}
		e.solver.Regulated(&p.Circuit, p.Output/(1+e.model.Error), 0, 1, &s)
		if !s.Status.OK() {
			break
		}
		p.Operate(&s)
	}
	return true
}

// placeAt puts the engine at the instant of a comparator's decision.
func (e *Engine) placeAt(d *loop.Instant) {
	j, m := &e.joint, &e.now
	c := &j.Circuit
	*m = moment{at: d.At, legs: d.Legs, drive: loop.Linear}
	copy(m.z[:j.Integral], d.State[:j.Integral])
	e.inputs(&m.z)
	if j.ToneRate != 0 {
		m.z[j.Tone+1] = 0 // no tone while the periodic solution is sought
	}
	for i := range c.Phases {
		// The last clock of the phase not after now.
		n := int(math.Floor((d.At-e.clock(i, 0))/c.Period + sameTime))
		p := &m.phases[i]
		*p = phase{count: n + 1, since: e.clock(i, n), clock: e.clock(i, n+1), off: math.Inf(1)}
		ramp := e.slope
		if e.follow != 0 {
			ramp = e.follow * c.Vin
		}
		p.ramp = ramp * (m.at - p.since)
	}
	m.phases[d.Phase].decided = true
	m.phases[d.Phase].off = m.at + e.delay
}

// relax runs the loop until it does what it will do for good, such as leaving out
// pulses at a light load, and starts from there.
func (e *Engine) relax() bool {
	mean := 0.0
	for n := range relaxPeriods {
		if !e.period() {
			return false
		}
		if n >= relaxPeriods-relaxMean {
			mean += e.lastMean / relaxMean
		}
	}
	e.lastMean, e.restless = mean, true
	return true
}

const (
	relaxPeriods = 3000 // [1] run before a start without a periodic solution
	relaxMean    = 256  // [1] of them over which the mean output is taken
)

// rewind takes the time of the present moment back by whole periods.
func (e *Engine) rewind(periods int) {
	m := &e.now
	back := float64(periods) * e.joint.Circuit.Period
	m.at -= back
	if math.Abs(m.at) <= e.grain() {
		m.at = 0
	}
	m.began -= back
	for i := range e.joint.Circuit.Phases {
		p := &m.phases[i]
		p.count -= periods
		p.since, p.off, p.clock = p.since-back, p.off-back, e.clock(i, p.count)
	}
}

const (
	shootingRounds    = 16
	shootingStep      = 1e-8  // [1] relative step of the difference quotients
	shootingTolerance = 1e-11 // [1] relative closure of one period at which the search ends
	shootingEnough    = 1e-8  // [1] at which its result is accepted if rounding stops it
	shootingGain      = 0.01  // [1] of the closure before: what a round with the derivatives at hand is to leave
)

// shoot solves for the moment that one period carries into itself, by Newton's
// method with difference quotients, which are formed anew only where those before
// no longer lead on. The present moment, at which no decision waits for its delay, is
// its start and its result.
func (e *Engine) shoot() bool {
	n := e.joint.Integral
	best := math.Inf(1)
	var derivative statespace.Real
	for range shootingRounds {
		base := e.now
		if !e.period() {
			return false
		}
		image := e.now
		closure := 0.0
		for k := range n {
			closure = max(closure, math.Abs(image.z[k]-base.z[k])/scaleOf(base.z[k]))
		}
		if closure <= shootingTolerance || closure >= best && closure <= shootingEnough {
			return true
		}
		if derivative.N == 0 || !(closure <= shootingGain*best) {
			if derivative.N = n; !e.differentiate(&derivative, &base, &image) {
				return false
			}
		}
		best = min(best, closure)
		var right statespace.Point
		for k := range n {
			right[k] = image.z[k] - base.z[k]
		}
		m := derivative
		if !m.Solve(&right) {
			return false
		}
		e.now = base
		for k := range n {
			e.now.z[k] += right[k]
		}
		// One period refreshes which phases rest.
		if !e.period() {
			return false
		}
	}
	return best <= shootingEnough
}

// differentiate sets m to one less the derivative of the map over one period, which
// takes base to image.
func (e *Engine) differentiate(m *statespace.Real, base, image *moment) bool {
	for k := range m.N {
		h := shootingStep * scaleOf(base.z[k])
		e.now = *base
		e.now.z[k] += h
		if !e.period() {
			return false
		}
		for i := range m.N {
			x := -(e.now.z[i] - image.z[i]) / h
			if i == k {
				x++
			}
			m.Set(i, k, x)
		}
	}
	return true
}

// scaleOf returns the size against which a state's change is measured.
func scaleOf(x float64) float64 { return max(math.Abs(x), 1e-2) }

// period runs one period and takes the time back.
func (e *Engine) period() bool {
	at := e.now.at
	e.advance(at + e.joint.Circuit.Period)
	e.rewind(1)
	e.now.at = at
	return e.status == Running
}

// Advance runs at most the given number of periods and reports whether the run
// goes on. A service calls it in chunks and looks for cancellation in between.
func (e *Engine) Advance(periods int) bool {
	if e.status != Running {
		return false
	}
	end := e.setup.Duration
	e.advance(min(end, e.now.at+float64(periods)*e.joint.Circuit.Period))
	if e.status == Running && e.now.at >= end-e.grain() {
		e.status = Finished
	}
	return e.status == Running
}
