package transient

import (
	"math"

	"railproof/calc/loop"
	"railproof/calc/parts"
)

// Sample is a value at a time.
type Sample struct {
	At    float64 // [s]
	Value float64 // [any] in the signal's unit
}

// Outcome is what happened from one event to the next, or from the start to the
// first event.
type Outcome struct {
	Event           int     // index in Setup.Events; -1 for the time before the first
	At              float64 // [s] at which it began
	Target          float64 // [V] mean output that the loop is to bring about
	Highest, Lowest Sample  // [V] true extremes of the output
	Up, Down        float64 // [V] how far the output rose above and fell below Target, ripple included
	Recovery        float64 // [s] from At until the mean of a period is in the band for good; NaN: it is not
	InductorPeak    Sample  // [A] greatest inductor current of a phase
	InductorLeast   Sample  // [A]
	Saturates       bool    // the peak passes the saturation current
	Limited         int     // pulses ended by the current limit
	AtMaxDuty       int     // pulses ended by the greatest duty ratio or the least off-time
	Skipped         int     // pulses left out because the comparator was tripped at the clock
	Continuous      int     // periods in which every phase conducted throughout
	Discontinuous   int     // periods in which one rested
	Clamped         float64 // [s] for which the error amplifier rested at a limit
}

// PeriodFigures sums up one period.
type PeriodFigures struct {
	At       float64 // [s] its end
	Mean     float64 // [V] mean output voltage, exact
	Inductor float64 // [A] inductor current of phase 0 at the clock
	Control  float64 // [V] control voltage at the clock
}

// Result sums up a run.
type Result struct {
	Status      Status
	At          float64 // [s] reached
	Periods     int
	StartMean   float64 // [V] mean output before the first event, from a periodic start
	Restless    bool    // no periodic solution was found: the run starts from what the loop settled to
	Outcomes    []Outcome
	Settled     bool // the last periods repeat each other
	Alternates  bool // they repeat every second time: subharmonic oscillation
	Final       PeriodFigures
	FinalLeast  float64 // [V] least output in the last period
	FinalMost   float64 // [V] greatest
	FinalChange float64 // [1] greatest relative change between the last periods
}

// tally collects the present outcome.
type tally struct {
	done   []Outcome
	now    Outcome
	target float64
	band   float64
	late   float64 // [s] end of the last period outside the band
	inside bool    // the last period was inside
	any    bool    // a period has ended since the event
	on     float64 // [s] for which phase 0 was on in the present period
	rested bool    // a phase rested in the present period

	least, most, lastLeast, lastMost float64 // [V] output in the present and in the last period
	closing                          bool    // the run is about to end: these are wanted exactly
	history                          [historyLength]PeriodFigures
	periods                          int
}

const historyLength = 32 // [1] periods looked at for settling

func (r *tally) start(e *Engine, event int) {
	nan := math.NaN()
	r.now = Outcome{
		Event: event, At: e.now.at, Target: r.target,
		Highest: Sample{nan, math.Inf(-1)}, Lowest: Sample{nan, math.Inf(1)},
		InductorPeak: Sample{nan, math.Inf(-1)}, InductorLeast: Sample{nan, math.Inf(1)},
	}
	r.any, r.inside, r.late = false, false, e.now.at
}

// begin closes the present outcome and opens that of an event.
func (r *tally) begin(e *Engine, event int) {
	if e.trial {
		return
	}
	r.done = append(r.done, r.close(e))
	if v := &e.setup.Events[event]; v.Kind == ReferenceStep {
		f := &e.setup.Plant.Feedback
		r.target += v.Change * (1 + f.Upper/f.Lower)
	}
	r.start(e, event)
}

// close completes the present outcome.
func (r *tally) close(e *Engine) Outcome {
	o := r.now
	o.Up, o.Down = max(0, o.Highest.Value-o.Target), max(0, o.Target-o.Lowest.Value)
	o.Recovery = math.NaN()
	if r.any && r.inside {
		o.Recovery = r.late - o.At
	}
	o.Saturates = parts.Known(e.setup.Saturation) && o.InductorPeak.Value > e.setup.Saturation
	return o
}

func (r *tally) counts(k int, value float64) bool {
	switch {
	case k == outputSignal:
		return value > r.now.Highest.Value || value < r.now.Lowest.Value || r.closing && (value > r.most || value < r.least)
	case k >= firstInductor:
		return value > r.now.InductorPeak.Value || value < r.now.InductorLeast.Value
	}
	return false
}

func (r *tally) keep(k int, s Sample) {
	switch {
	case k == outputSignal:
		if s.Value > r.now.Highest.Value {
			r.now.Highest = s
		}
		if s.Value < r.now.Lowest.Value {
			r.now.Lowest = s
		}
		r.most, r.least = max(r.most, s.Value), min(r.least, s.Value)
	case k >= firstInductor:
		if s.Value > r.now.InductorPeak.Value {
			r.now.InductorPeak = s
		}
		if s.Value < r.now.InductorLeast.Value {
			r.now.InductorLeast = s
		}
	}
}

// closePeriod takes the figures of the period that ends at the clock of phase 0.
func (e *Engine) closePeriod() {
	m := &e.now
	m.edges = 0
	length := m.at - m.began
	if length > e.grain() {
		e.lastMean = m.z[e.joint.Integral] / length
	}
	if length > e.grain() && !e.trial {
		r := &e.run
		p := PeriodFigures{m.at, e.lastMean, m.z[0], e.control[m.drive].At(&m.z, e.width)}
		r.history[r.periods%historyLength] = p
		e.rec.finish(r.periods, r.on/length, m.began, m.at)
		r.periods++
		if r.rested {
			r.now.Discontinuous++
		} else {
			r.now.Continuous++
		}
		r.any, r.inside = true, math.Abs(p.Mean-r.target) <= r.band
		if !r.inside {
			r.late = m.at
		}
		r.lastLeast, r.lastMost = r.least, r.most
		r.least, r.most = math.Inf(1), math.Inf(-1)
		if !(p.Mean > -collapse*r.target) {
			e.status = Collapsed
		}
	}
	e.run.on, e.run.rested = 0, false
	for i := range e.joint.Circuit.Phases {
		e.run.rested = e.run.rested || m.legs[i] == loop.Idle && e.joint.Circuit.Phases > 1
	}
	e.run.closing = m.at >= e.setup.Duration-2.5*e.joint.Circuit.Period
	m.began = m.at
	m.z[e.joint.Integral] = 0
}

// collapse is the negative output, as a part of the target, at which a run ends.
const collapse = 0.05

const (
	settledWithin   = 1e-7 // [1] relative change of mean and current over the last periods
	alternatesAbove = 1e-4 // [1] change from one period to the next that is no rounding
)

// Result returns what is known so far.
func (e *Engine) Result() Result {
	r := &e.run
	res := Result{
		Status: e.status, At: e.now.at, Periods: r.periods, StartMean: e.startMean, Restless: e.restless,
		Outcomes: append(append([]Outcome(nil), r.done...), r.close(e)), FinalLeast: r.lastLeast, FinalMost: r.lastMost,
	}
	if r.periods < historyLength {
		return res
	}
	at := func(back int) *PeriodFigures { return &r.history[(r.periods-1-back+historyLength)%historyLength] }
	res.Final = *at(0)
	current := 0.0
	for k := range historyLength {
		current = max(current, math.Abs(at(k).Inductor))
	}
	current = max(current, 1e-3*math.Abs(r.now.InductorPeak.Value))
	one, two := 0.0, 0.0
	change := func(a, b *PeriodFigures) float64 {
		return max(math.Abs(a.Mean-b.Mean)/math.Abs(r.target), math.Abs(a.Inductor-b.Inductor)/current)
	}
	for k := range historyLength - 2 {
		one, two = max(one, change(at(k), at(k+1))), max(two, change(at(k), at(k+2)))
	}
	res.FinalChange = max(one, change(at(0), at(historyLength-1)))
	res.Settled = res.FinalChange <= settledWithin
	res.Alternates = one > alternatesAbove && two < one/10
	return res
}
