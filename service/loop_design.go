package service

import (
	"context"
	"errors"
	"fmt"
	"math"
	"strings"

	"railproof/calc/evaluate"
	"railproof/calc/loop"
	"railproof/calc/parts"
)

// UnreachableTarget tells that no network of the wanted type does what is asked,
// and what can be reached.
type UnreachableTarget struct {
	loop.UnreachableError
	Crossover float64 // [Hz] highest at which the phase margin can be had; NaN: none was found
}

// NotRegulating tells that the first point has no loop to design for.
type NotRegulating struct {
	At     string
	Status evaluate.Status
	Detail string
}

// Error names the point and its status.
func (e *NotRegulating) Error() string { return "service: " + e.At + ": " + e.Status.String() }

// design designs the compensator at the first point and puts it into the stage.
func (s *Service) design(ctx context.Context, r *LoopRequest, d *Design, a *LoopAnswer) error {
	b := &loopBench{evaluator: s.evaluator(d.Stage)}
	defer s.release(b.evaluator)
	p := r.Places[0].Point
	if r.Filter != nil {
		p.SourceResistance += r.Filter.Resistance
	}
	var result evaluate.Result
	b.evaluator.Eval(&p, &result)
	if !b.plant.Bind(b.evaluator, result.Status) {
		o := outcome(b.evaluator, &p)
		return &NotRegulating{r.Places[0].At, o.Status, o.Detail}
	}
	t := *r.Target
	design, err := b.sampled.Synthesise(&b.plant, t)
	if unreachable, is := errors.AsType[*loop.UnreachableError](err); is {
		reach := b.reach(ctx, t)
		unreachable.Bound = b.bound(ctx, t, unreachable.Bound)
		if err := context.Cause(ctx); err != nil {
			return err
		}
		return &UnreachableTarget{*unreachable, reach}
	}
	if err != nil {
		return err
	}
	a.Design = &design
	st := d.Stage.Clone()
	st.Compensator = design.Compensator
	d.Stage = st
	kept := d.Variables[:0:0]
	for _, v := range d.Variables {
		if !strings.HasPrefix(v.Field, "compensator/") {
			kept = append(kept, v)
		}
	}
	d.Variables = kept
	return nil
}

const (
	reachSteps = 24   // [1] crossovers tried below the one asked for
	reachSpan  = 1e-3 // [1] lowest of them over the one asked for
	reachFine  = 12   // [1] halvings between the last that fails and the first that works
)

// bound returns the greatest phase margin [deg] that can be had at the crossover, to
// four digits downwards and tried out; parts.Unknown where none is found. Its search
// begins from what the synthesis takes for the bound, if it knows one.
func (b *loopBench) bound(ctx context.Context, t loop.Target, supposed float64) float64 {
	works := func(margin float64) bool {
		t.PhaseMargin = margin
		return b.works(ctx, t)
	}
	bad := t.PhaseMargin
	if parts.Known(supposed) {
		bad = math.Min(bad, supposed)
	}
	good := downward(bad)
	for range reachFine {
		if !(good > 0) {
			return parts.Unknown
		}
		if works(good) {
			break
		}
		bad, good = good, 0.8*good
	}
	for range reachFine {
		if middle := (good + bad) / 2; works(middle) {
			good = middle
		} else {
			bad = middle
		}
	}
	if good = downward(good); !works(good) {
		return parts.Unknown
	}
	return good
}

// downward returns x rounded down to four digits.
func downward(x float64) float64 {
	unit := math.Pow(10, math.Floor(math.Log10(x))-3)
	return math.Floor(x/unit) * unit
}

// works reports whether a target can be met; nothing can once the caller has left.
func (b *loopBench) works(ctx context.Context, t loop.Target) bool {
	if ctx.Err() != nil {
		return false
	}
	_, err := b.sampled.Synthesise(&b.plant, t)
	return err == nil
}

// reach returns the highest crossover below that asked for at which the phase
// margin can be had; parts.Unknown where none is found.
func (b *loopBench) reach(ctx context.Context, t loop.Target) float64 {
	works := func(f float64) bool {
		t.Crossover = f
		return b.works(ctx, t)
	}
	tried := make([]float64, reachSteps)
	loop.Frequencies(tried, t.Crossover, t.Crossover*reachSpan)
	for i := 1; i < len(tried); i++ {
		if !works(tried[i]) {
			continue
		}
		good, bad := tried[i], tried[i-1]
		for range reachFine {
			if middle := (good + bad) / 2; works(middle) {
				good = middle
			} else {
				bad = middle
			}
		}
		return downward(good)
	}
	return parts.Unknown
}

// Reachable says what can be reached instead.
func (e *UnreachableTarget) Reachable() string {
	var s []string
	if parts.Known(e.Bound) {
		s = append(s, fmt.Sprintf("a phase margin up to %.4g deg at this crossover", e.Bound))
	}
	if parts.Known(e.Crossover) {
		s = append(s, fmt.Sprintf("a crossover up to %.4g Hz with this phase margin", e.Crossover))
	}
	if len(s) == 0 {
		return "nothing near it: no crossover down to a thousandth of this one gives this phase margin"
	}
	return strings.Join(s, ", or ")
}
