package service

import (
	"context"
	"fmt"
	"math"

	"railproof/calc/caution"
	"railproof/calc/evaluate"
	"railproof/calc/loop"
	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/stage"
	"railproof/calc/transient"
)

// Disturbance is what happens to a stage in closed loop.
type Disturbance struct {
	Kind      DisturbanceKind
	To        float64 // [any] load [A], input [V] or reference over its own [1]; not for a start
	Slew      float64 // [any] [A/s] or [V/s]
	BackAfter float64 // [s] after which the load returns; parts.Unknown: it does not
	SoftStart float64 // [s] of a start
	PreBias   float64 // [V] output before a start
	LoadFrom  float64 // [V] output from which the constant-current load draws; parts.Unknown: the default
}

// DisturbanceKind names the disturbances.
type DisturbanceKind uint8

const (
	LoadStepEvent DisturbanceKind = iota
	InputStepEvent
	ReferenceStepEvent
	StartUpEvent
)

// TransientsRequest asks for the closed loop cycle by cycle.
type TransientsRequest struct {
	Design   Design
	Place    Place
	Event    Disturbance
	EventAt  string  // pointer of the event in the request
	Duration float64 // [s] after the event; parts.Unknown: the default
	Lead     float64 // [s] before the event; parts.Unknown: the default
	Band     float64 // [1] half width of the band of recovery over the output that the divider sets
	Points   int     // instants of the waveforms; 0: none
}

// TransientsAnswer is what happened.
type TransientsAnswer struct {
	Outcome   *Outcome // of the starting point
	Status    string   // that of the starting point where it does not work, else that of the run
	Detail    string
	Ran       bool              // the loop was followed
	Run       *transient.Result // nil: it was not
	Seen      Seen
	Rows      []transient.Row // of the waveforms, in order of time; the event is at Lead
	Lead      float64         // [s]
	Duration  float64         // [s] after the event
	Band      float64         // [V]
	Resistive float64         // [S] load besides its constant current
	Expected  float64         // [V] mean output of the steady state that follows; NaN: there is none
	Rating    float64         // [A] saturation; NaN: not stated
	Phases    int
	Basis     Basis
}

// MostPeriods bounds the length of a run: about two seconds of computing.
const MostPeriods = 500_000 // [1]

const (
	followedPeriods = 500.0 // [1] after the last change, by default
	leadPeriods     = 5.0   // [1] before the event, by default
	periodChunk     = 100   // [1] periods between two looks at the context: well below 1 ms
	shortRun        = 20000 // [1] periods that still count as short work
	loadFromShare   = 0.5   // [1] of the output at which the load of a start draws by default
)

// TooLong tells that a run was asked for that is longer than MostPeriods.
type TooLong struct {
	Asked float64 // [s] after the event
	Most  float64 // [s]
}

// Error names the limit.
func (e *TooLong) Error() string {
	return fmt.Sprintf("service: a run of %g s, at most %g s", e.Asked, e.Most)
}

// Transients follows the closed loop through an event. The error is a
// *stage.InvalidError or a *TooLong.
func (s *Service) Transients(ctx context.Context, r *TransientsRequest) (*TransientsAnswer, error) {
	period := 1 / r.Design.Stage.SwitchingFrequency
	a := &TransientsAnswer{Expected: parts.Unknown, Phases: max(1, r.Design.Stage.PhaseCount), Resistive: r.Place.Point.Load.Conductance, Rating: r.Design.Stage.Inductor.Rating.Saturation}
	a.Lead, a.Duration = r.span(period)
	periods := math.Ceil((a.Lead+a.Duration)/period - 1e-6)
	if periods > MostPeriods {
		return nil, &TooLong{a.Duration, MostPeriods*period - a.Lead}
	}
	a.Band = r.Band * r.Design.Stage.Feedback.OutputVoltage()
	kind := interactive
	if periods > shortRun {
		kind = bulk
	}
	err := s.run(ctx, kind, func() error {
		e := s.evaluator(r.Design.Stage)
		defer s.release(e)
		a.Outcome = outcome(e, &r.Place.Point)
		s.done.count(a.Outcome.Status)
		a.Status, a.Detail = a.Outcome.Status.String(), a.Outcome.Detail
		if err := s.follow(ctx, s.turns(kind), r, a, e, periods*period); err != nil {
			return err
		}
		a.Basis = s.rests(&r.Design, e, []Place{r.Place}, []*Outcome{a.Outcome}, caution.Seen{Precharged: a.Ran && r.Event.Kind == StartUpEvent && r.Event.PreBias > 0})
		r.rests(a)
		return nil
	})
	if err != nil {
		return nil, err
	}
	return a, nil
}

// span returns what of a run lies before and after the event [s].
func (r *TransientsRequest) span(period float64) (lead, duration float64) {
	v := &r.Event
	lead, duration = leadPeriods*period, followedPeriods*period
	switch {
	case v.Kind == StartUpEvent:
		lead = 0
		duration += v.SoftStart
	case parts.Known(v.BackAfter):
		duration += v.BackAfter
	}
	if parts.Known(r.Lead) && v.Kind != StartUpEvent {
		lead = r.Lead
	}
	if parts.Known(r.Duration) {
		duration = r.Duration
	}
	return lead, duration
}

// follow runs the loop from the starting point.
func (s *Service) follow(ctx context.Context, turns *cores, r *TransientsRequest, a *TransientsAnswer, e *evaluate.Evaluator, length float64) error {
	var result evaluate.Result
	e.Eval(&r.Place.Point, &result)
	setup := transient.Setup{Duration: length, Band: a.Band}
	if !setup.Bind(e, result.Status) {
		return nil
	}
	if r.Points > 0 {
		setup.Record = transient.Record{Points: r.Points}
	}
	b := &aftermath{evaluator: e}
	if err := r.schedule(&setup, a, b, &result); err != nil {
		return err
	}
	run, err := transient.New(&setup)
	if err != nil {
		return err
	}
	chunks := int(math.Ceil(length / setup.Plant.Circuit.Period / periodChunk))
	meter := MeterOf(ctx)
	meter.Expect(chunks)
	turns.take()
	defer turns.give()
	for run.Advance(periodChunk) {
		if err := context.Cause(ctx); err != nil {
			return err
		}
		meter.Add(1)
		turns.next()
	}
	meter.Add(1)
	end := run.Result()
	a.Ran, a.Run, a.Rows = true, &end, run.Rows()
	a.Seen = r.seen(a)
	before := loop.Undecided
	if r.Event.Kind != StartUpEvent {
		before = b.stability(&setup.Plant)
	}
	after := b.find(r)
	a.Expected = b.mean
	r.judge(a, before, after, b.status)
	return nil
}

// schedule puts the event into the setup.
func (r *TransientsRequest) schedule(setup *transient.Setup, a *TransientsAnswer, b *aftermath, at *evaluate.Result) error {
	v := &r.Event
	p := &r.Place.Point
	add := func(k transient.EventKind, when, change float64) {
		setup.Events = append(setup.Events, transient.Event{Kind: k, At: when, Change: change, Slew: v.Slew})
	}
	switch v.Kind {
	case LoadStepEvent:
		change := v.To - p.Load.Current
		add(transient.LoadStep, a.Lead, change)
		if parts.Known(v.BackAfter) {
			if !(v.BackAfter < a.Duration) {
				return &stage.InvalidError{Faults: []stage.Fault{{Field: "events/load_step/back_after_s", Given: v.BackAfter, Limit: a.Duration, Accepted: "below " + short(a.Duration) + " s, the time that is followed", Detail: "the load returns before the end"}}}
			}
			if rise := math.Abs(change) / v.Slew; !(v.BackAfter >= rise) {
				return &stage.InvalidError{Faults: []stage.Fault{{Field: "events/load_step/back_after_s", Given: v.BackAfter, Limit: rise, Accepted: "at least " + short(rise) + " s, which the step itself takes", Detail: "the load returns after it has arrived"}}}
			}
			add(transient.LoadStep, a.Lead+v.BackAfter, -change)
		}
	case InputStepEvent:
		// The bridge sees the source less the drop in its path.
		change := v.To - p.Input
		if after := b.at(r, parts.Unknown); after.Status.Figures() {
			change = after.Quantities[quantity.BridgeVoltage] - at.Quantities[quantity.BridgeVoltage]
		}
		add(transient.InputStep, a.Lead, change)
	case ReferenceStepEvent:
		add(transient.ReferenceStep, a.Lead, (v.To-1)*setup.Plant.Feedback.Reference)
	case StartUpEvent:
		from := v.LoadFrom
		if !parts.Known(from) {
			from = loadFromShare * setup.Plant.Feedback.OutputVoltage()
		}
		setup.Start = transient.Start{Kind: transient.AtRest, Precharge: v.PreBias, SoftStart: v.SoftStart, LoadFrom: from}
	}
	return nil
}
