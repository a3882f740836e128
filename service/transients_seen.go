package service

import (
	"math"

	"railproof/calc/evaluate"
	"railproof/calc/loop"
	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/transient"
)

// Seen sums up what happened after the event. Times count from it; NaN stands
// where there is none.
type Seen struct {
	Before, After   float64 // [V] mean output before, at the end
	Least, Greatest transient.Sample
	Down, Up        float64 // [V] below the lower and above the greater of the means before and after
	Overshoot       float64 // [1] of a reference step or start
	Recovery        float64 // [s] NaN: the output did not come back for good
	Peak, Valley    float64 // [A] inductor current of a phase
	Saturates       bool
	Limited         int // pulses ended by the current limit
	AtMaxDuty       int
	Skipped         int
	Continuous      bool // periods in which every phase conducted throughout were seen
	Discontinuous   bool
}

// seen sums up the outcomes of a run.
func (r *TransientsRequest) seen(a *TransientsAnswer) Seen {
	list := a.Run.Outcomes
	x := Seen{Before: a.Run.StartMean, After: parts.Unknown, Overshoot: parts.Unknown, Peak: math.Inf(-1), Valley: math.Inf(1)}
	if r.Event.Kind != StartUpEvent {
		list = list[min(1, len(list)):]
	}
	if len(list) == 0 { // the run ended before the event
		unknown := transient.Sample{At: parts.Unknown, Value: parts.Unknown}
		x.Least, x.Greatest, x.Recovery = unknown, unknown, parts.Unknown
		x.Down, x.Up, x.Peak, x.Valley = parts.Unknown, parts.Unknown, parts.Unknown, parts.Unknown
		return x
	}
	x.Least.Value, x.Greatest.Value = math.Inf(1), math.Inf(-1)
	for i := range list {
		o := &list[i]
		if o.Lowest.Value < x.Least.Value {
			x.Least = o.Lowest
		}
		if o.Highest.Value > x.Greatest.Value {
			x.Greatest = o.Highest
		}
		x.Peak, x.Valley = math.Max(x.Peak, o.InductorPeak.Value), math.Min(x.Valley, o.InductorLeast.Value)
		x.Recovery = math.Max(x.Recovery, o.Recovery) // NaN stays
		x.Saturates = x.Saturates || o.Saturates
		x.Limited, x.AtMaxDuty, x.Skipped = x.Limited+o.Limited, x.AtMaxDuty+o.AtMaxDuty, x.Skipped+o.Skipped
		x.Continuous, x.Discontinuous = x.Continuous || o.Continuous > 0, x.Discontinuous || o.Discontinuous > 0
	}
	x.Least.At, x.Greatest.At = x.Least.At-a.Lead, x.Greatest.At-a.Lead
	if a.Run.Final.At > 0 {
		x.After = a.Run.Final.Mean
	}
	r.excursions(&x, list[len(list)-1].Target)
	return x
}

// excursions fills deviations and overshoot; target is the mean output that the loop
// is to bring about in the end.
func (r *TransientsRequest) excursions(x *Seen, target float64) {
	low, high := math.Min(x.Before, target), math.Max(x.Before, target)
	if r.Event.Kind == StartUpEvent {
		low, high = r.Event.PreBias, target
	}
	x.Down, x.Up = math.Max(0, low-x.Least.Value), math.Max(0, x.Greatest.Value-high)
	switch change := target - x.Before; {
	case r.Event.Kind == StartUpEvent && target > r.Event.PreBias:
		x.Overshoot = x.Up / (target - r.Event.PreBias)
	case r.Event.Kind == ReferenceStepEvent && change > 0:
		x.Overshoot = x.Up / change
	case r.Event.Kind == ReferenceStepEvent && change < 0:
		x.Overshoot = x.Down / -change
	}
}

// judge sets the status of a run that was made.
func (r *TransientsRequest) judge(a *TransientsAnswer, before, after loop.Stability, follows evaluate.Status) {
	switch run := a.Run; {
	case run.Status == transient.NoStart:
		a.Status, a.Detail = "no-comparison", "the loop has no periodic operation at the starting point that the run could begin with"
		a.Ran = false
	case run.Status == transient.Collapsed:
		a.Expected = parts.Unknown
		a.Status, a.Detail = "collapsed", "the load drags the output below zero "+sinceEvent(run.At-a.Lead)
	case run.Status == transient.TooStiff:
		a.Status, a.Detail = "not-converged", "a time constant is too short against the switching period to be followed"
	case run.Status == transient.Stalled:
		a.Status, a.Detail = "not-converged", "more edges within one period than a controller can make, "+sinceEvent(run.At-a.Lead)
	case before == loop.Unstable:
		a.Status, a.Detail = "unstable", "the loop does not hold its operating point before the event: what is shown is the oscillation that it settles to"
	case run.Alternates:
		a.Status, a.Detail = "unstable", "every second period repeats, not every one: the loop oscillates at half the switching frequency"
	case !follows.OK() && follows != evaluate.OverTemperature:
		a.Status, a.Detail = follows.String(), "the stage does not regulate at the operating point that follows the event: "+follows.String()
	case after == loop.Unstable:
		a.Status, a.Detail = "unstable", "the loop does not hold the operating point that follows the event"
	}
}

// sinceEvent tells an instant [s], counted from the event.
func sinceEvent(at float64) string {
	if at < 0 {
		return short(-at) + " s before the event"
	}
	return short(at) + " s after the event"
}

// rests adds what a run rests on besides.
func (r *TransientsRequest) rests(a *TransientsAnswer) {
	if !a.Ran {
		return
	}
	v := &r.Event
	if v.Kind == StartUpEvent && !parts.Known(v.LoadFrom) && r.Place.Point.Load.Current > 0 {
		set := r.Design.Stage.Feedback.OutputVoltage()
		a.Basis.Assumptions = append(a.Basis.Assumptions, Assumption{
			Pointer: r.EventAt + "/start_up/load_from_v", Value: loadFromShare * set, Low: 0, High: set,
			Why: "output from which the constant-current load draws not given: taken as half of what the divider sets",
		})
	}
	warn := warnings{a.Basis.Warnings}
	if a.Seen.Saturates {
		warn.add("saturation", r.Design.At+"/inductor/rating/saturation_a", "the inductor current reaches %s A, above the %s A at which the inductor saturates; with its inductance held at that of the starting point, the real peak is higher", a.Seen.Peak, a.Rating)
	}
	if a.Run.Restless {
		warn.add("no-periodic-start", r.Place.At, "no periodic operation was found at the starting point: the run begins with what the loop settled to, such as leaving out pulses at a light load")
	}
	if len(r.Design.Stage.Phases) > 0 {
		warn.keep(Warning{"phase-sharing", r.Design.At + "/phases", "the comparators give unequal phases duty ratios of their own, and the phases share the current accordingly, in voltage mode unevenly; /v1/steady-state gives all phases one duty ratio, so that their currents differ from those here"})
	}
	if table := &r.Design.Stage.Inductor.InductanceAtCurrent; len(table.X) > 0 && a.Seen.Peak > 0 {
		start := table.At(a.Outcome.Quantities[quantity.InductorMean])
		if least := table.At(a.Seen.Peak); least < leastHeldInductance*start {
			warn.add("inductance-held", r.Design.At+"/inductor/inductance_at_current", "at the peak of %s A the inductor has %s times the inductance that it has at the starting point, which the run keeps", a.Seen.Peak, least/start)
		}
	}
	a.Basis.Warnings = warn.list
}

// leastHeldInductance is how far the inductance at the peak may fall below that of
// the starting point before the answer says so.
const leastHeldInductance = 0.9 // [1]
