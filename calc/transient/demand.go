package transient

import (
	"math"

	"railproof/calc/evaluate"
	"railproof/calc/parts"
	"railproof/calc/stage"
)

// Demand is the load step that a requirement asks for: between the greatest load
// and that less the step.
type Demand struct {
	From, To float64 // [A]
	Slew     float64 // [A/s]
	Band     float64 // [V] half-width of what counts as recovered
	Recovery float64 // [s] allowed; parts.Unknown: not asked
}

// RecoveryBand is the half-width of the band that counts as recovered, over the
// output voltage.
const RecoveryBand = 0.01 // [1]

// DemandOf returns the load step of a requirement, and false where none is asked.
func DemandOf(r *stage.Requirement) (Demand, bool) {
	s := &r.Targets.LoadStep
	if !(s.Step > 0) {
		return Demand{}, false
	}
	most := r.LoadCurrent.Max
	return Demand{math.Max(r.LoadCurrent.Min, most-s.Step), most, s.Slew, RecoveryBand * r.Output, s.Recovery}, true
}

// Length of a followed step, in periods.
const (
	stepAfter   = 2.3   // [1] periods before it, between two clocks
	leastFollow = 60.0  // [1]
	mostFollow  = 800.0 // [1]
)

// Start returns the load before the step is applied or removed [A].
func (d *Demand) Start(applied bool) float64 {
	if applied {
		return d.From
	}
	return d.To
}

// Follower follows the step of a demand on evaluated stages. It keeps its
// workspace; one per goroutine.
type Follower struct {
	Demand
	engine Engine
	result evaluate.Result
}

// Follow runs the step, applied or removed, in closed loop from a point whose load
// it sets. It ends when all that counts has happened in the first half of the time
// followed, at most after 800 periods. It reports false where the stage does not
// regulate or the run came to nothing.
func (f *Follower) Follow(e *evaluate.Evaluator, p *stage.Point, applied bool) (Outcome, bool) {
	at := *p
	at.Load = stage.Load{Current: f.Start(applied)}
	e.Eval(&at, &f.result)
	setup := Setup{Band: f.Band}
	if !setup.Bind(e, f.result.Status) {
		return Outcome{}, false
	}
	period := setup.Plant.Circuit.Period
	setup.Saturation = parts.Unknown
	setup.Duration = (stepAfter + mostFollow) * period
	setup.Events = []Event{{Kind: LoadStep, At: stepAfter * period, Change: f.From + f.To - 2*at.Load.Current, Slew: f.Slew}}
	run := &f.engine
	if run.Reset(&setup) != nil {
		return Outcome{}, false
	}
	periods := leastFollow
	if parts.Known(f.Recovery) {
		periods = min(mostFollow, max(periods, 1.5*f.Recovery/period))
	}
	for run.Advance(int(math.Ceil(stepAfter + periods - run.now.at/period))) {
		if o := run.run.close(run); o.over(run.now.at) {
			return o, true
		}
		periods *= 2
	}
	return run.run.close(run), run.status.OK()
}

// over reports whether the greater deviation and the return into the band lie in
// the first half of the time since the event.
func (o *Outcome) over(now float64) bool {
	turned := o.Lowest.At
	if o.Up > o.Down {
		turned = o.Highest.At
	}
	return 2*(turned-o.At) <= now-o.At && 2*o.Recovery <= now-o.At
}
