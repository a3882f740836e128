package transient

import (
	"math"

	"railproof/calc/loop"
	"railproof/calc/parts"
	"railproof/calc/statespace"
	"railproof/calc/switched"
)

// phase is what the controller knows about one phase.
type phase struct {
	clock   float64 // [s] next turn-on
	count   int     // clocks that have passed
	since   float64 // [s] last turn-on
	ramp    float64 // [V] comparator ramp at the present time
	off     float64 // [s] when the high side turns off, +Inf while undecided
	decided bool    // the comparator or the limit has tripped
}

// moment is the complete state of a run at one time; it is copied to try things.
type moment struct {
	at     float64 // [s]
	z      statespace.Point
	rate   [statespace.MaxInputs]float64 // of the inputs
	rates  int                           // index of that rate among those met
	legs   loop.Legs
	drive  loop.Drive
	next   int     // next breakpoint
	soft   bool    // the reference is still being ramped up: reverse current is blocked
	began  float64 // [s] start of the present period
	edges  int     // in it
	waits  bool    // the constant-current load is not yet connected
	phases [switched.MaxPhases]phase
}

// Engine runs one setup. It is made by New and used by one goroutine; Reset gives
// it another setup and keeps its memory.
type Engine struct {
	setup  Setup
	joint  loop.Joint
	delay  float64 // [s] comparator to switch
	blank  float64 // [s] after turn-on before the comparator counts
	most   float64 // [s] longest on-time
	slope  float64 // [V/s] comparator ramp without feed-forward
	follow float64 // [1/s] ramp slope per volt of source, with feed-forward
	sense  float64
	limit  float64 // [A] +Inf: none
	width  int     // states and inputs
	points []breakpoint

	control [loop.DriveStates]statespace.Functional
	trip    [loop.DriveStates][switched.MaxPhases]statespace.Event // comparator
	over    [switched.MaxPhases]statespace.Event                   // current limit
	rest    [switched.MaxPhases]statespace.Event                   // inductor current falls to zero
	high    statespace.Event                                       // control voltage above its upper limit
	low     statespace.Event                                       // below its lower limit
	leave   [loop.DriveStates]statespace.Event                     // a held control voltage moves again
	connect statespace.Event                                       // the output lets the load start
	watched []watcher

	rateList [][statespace.MaxInputs]float64
	shelf    map[uint32]*interval
	idle     []*interval // of setups before
	*starter

	now    moment
	status Status
	trial  bool // a period is only tried out: nothing is recorded
	shape  [loop.DriveStates][maxSignals]statespace.Functional
	head   [maxSignals]reading // as the present step begins
	rec    recorder
	run    tally

	restless  bool    // the start is no periodic solution
	startMean float64 // [V]
	lastMean  float64 // [V] of the last period
}

// interval is the exact motion in one state of switches, amplifier and inputs.
type interval struct {
	statespace.Ladder
	slopes [maxSignals]statespace.Functional // of the recorded signals
	read   []float64                         // row by row: the recorded signals, then their slopes
}

// Status tells how a run stands.
type Status uint8

const (
	NotRun    Status = iota
	Running          // periods are left
	Finished         // the whole duration was run
	NoStart          // the operating point has no loop to start from
	Stalled          // more edges within one period than a controller can make
	TooStiff         // a time constant is too short against the period to be followed
	Collapsed        // the load drags the output below zero, where the circuit is no longer that of the model
)

// OK reports whether the whole run was made.
func (s Status) OK() bool { return s == Finished }

const (
	stepsPerPeriod = 12  // [1] whole steps in a period; extremes and crossings between them are solved
	maxEdges       = 400 // [1] in one period
	sameTime       = 1e-12
)

// New prepares a run. The error is a *stage.InvalidError. A start that cannot be
// found is a status of the engine.
func New(s *Setup) (*Engine, error) {
	e := new(Engine)
	return e, e.Reset(s)
}

// Reset prepares another run, as New does.
func (e *Engine) Reset(s *Setup) error {
	if err := s.Check(); err != nil {
		return err
	}
	p := &s.Plant
	for _, v := range e.shelf {
		e.idle = append(e.idle, v)
	}
	clear(e.shelf)
	*e = Engine{
		setup: *s, status: Running, delay: p.Modulator.Delay, sense: 0, limit: math.Inf(1),
		shelf: e.shelf, idle: e.idle, starter: e.starter, watched: e.watched[:0], points: e.points[:0], rateList: e.rateList[:0],
	}
	if e.shelf == nil {
		e.shelf, e.starter = map[uint32]*interval{}, new(starter)
	}
	e.joint.Integrate = true
	for _, ev := range s.Events {
		if ev.Kind.tone() {
			e.joint.ToneRate = 2 * math.Pi * ev.Frequency
			e.joint.ToneInput = toneInput(ev.Kind)
		}
	}
	e.joint.Set(p, loop.Limits{Low: s.Bounds.ControlLow, High: s.Bounds.ControlHigh})
	e.width = e.joint.N + loop.Inputs
	e.blank = max(0, s.Bounds.MinOn-e.delay)
	period := p.Circuit.Period
	e.most = period * s.Bounds.MaxDuty
	if s.Bounds.MinOff > 0 {
		e.most = min(e.most, period-s.Bounds.MinOff)
	}
	e.slope = p.RampSlope()
	if p.Modulator.Mode == parts.PeakCurrentMode {
		e.sense = p.Modulator.Sense
	} else if p.Modulator.FeedForward {
		e.follow, e.slope = e.slope/p.Circuit.Vin, 0
	}
	if parts.Known(p.Modulator.CurrentLimit) {
		e.limit = p.Modulator.CurrentLimit
	}
	e.functionals()
	e.schedule()
	e.rec.set(e)
	e.begin()
	return nil
}

// functionals prepares the linear outputs that are watched.
func (e *Engine) functionals() {
	j := &e.joint
	for d := range e.control {
		e.control[d] = j.Control(loop.Drive(d))
	}
	b := &e.setup.Bounds
	e.high = statespace.Event{Output: e.control[loop.Linear], Offset: -b.ControlHigh}
	e.low = statespace.Event{Output: negated(e.control[loop.Linear]), Offset: b.ControlLow}
	e.leave[loop.HeldHigh].Output = negated(j.Push(loop.HeldHigh))
	e.leave[loop.HeldLow].Output = j.Push(loop.HeldLow)
	for i := range j.Circuit.Phases {
		for d := range e.trip {
			f := negated(e.control[d])
			f[i] += e.sense
			if j.ToneRate != 0 && j.ToneInput == loop.NoInput {
				f[j.Tone]--
			}
			e.trip[d][i].Output = f
		}
		e.over[i].Output[i], e.over[i].Offset = 1, -e.limit
		e.rest[i].Output[i] = -1
	}
	for d := range e.shape {
		for k := range firstInductor + j.Circuit.Phases {
			e.shape[d][k] = e.signal(k, loop.Drive(d))
		}
	}
	e.connect = statespace.Event{Output: j.Output, Offset: -e.setup.Start.LoadFrom}
}

func negated(f statespace.Functional) statespace.Functional {
	for i := range f {
		f[i] = -f[i]
	}
	return f
}

// motion returns the motion in the present state of the engine, or nil if it is
// too stiff to be followed.
func (e *Engine) motion() *interval {
	m := &e.now
	key := uint32(m.rates)<<16 | uint32(m.drive)<<14
	for i := range e.joint.Circuit.Phases {
		key |= uint32(m.legs[i]) << (2 * i)
	}
	v, ok := e.shelf[key]
	if !ok {
		if v = e.prepare(); v == nil {
			e.status = TooStiff
			return nil
		}
		e.shelf[key] = v
	}
	return v
}

// prepare makes the motion of the present state; nil for one too stiff.
func (e *Engine) prepare() *interval {
	v := new(interval)
	if n := len(e.idle); n > 0 {
		v, e.idle = e.idle[n-1], e.idle[:n-1]
	}
	m := &e.now
	e.joint.Assemble(&v.System, &m.legs, m.drive)
	v.System.Rate = m.rate
	if !v.Set(e.setup.Plant.Circuit.Period / stepsPerPeriod) {
		return nil
	}
	v.read = v.read[:0]
	for k := range e.rec.count {
		v.read = append(v.read, e.shape[m.drive][k][:e.width]...)
	}
	for k := range e.rec.count {
		v.slopes[k] = slopeOf(&e.shape[m.drive][k], &v.System)
		v.read = append(v.read, v.slopes[k][:e.width]...)
	}
	return v
}

// slopeOf returns the functional whose value is the rate of change of f.
func slopeOf(f *statespace.Functional, s *statespace.System) statespace.Functional {
	var g statespace.Functional
	for i := range s.N {
		for k, a := range s.Row(i) {
			g[k] += f[i] * a
		}
	}
	for k := range s.M {
		g[s.N+s.M-1] += f[s.N+k] * s.Rate[k]
	}
	return g
}

// toneInput returns the input that a tone is added to.
func toneInput(k EventKind) int {
	switch k {
	case LoadTone:
		return loop.InputLoad
	case InputTone:
		return loop.InputVoltage
	}
	return loop.NoInput
}
