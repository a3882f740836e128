package service

import (
	"fmt"
	"math"
	"slices"

	"railproof/calc/caution"
	"railproof/calc/corners"
	"railproof/calc/evaluate"
	"railproof/calc/stage"
)

// concludeCorners judges and gathers what the answer rests on.
func (s *Service) concludeCorners(a *CornersAnswer) {
	a.judge()
	parts := []*CornersAnswer{a}
	if a.FullLoad != nil {
		parts = append(parts, a.FullLoad)
	}
	d := &a.Design
	var seen caution.Seen
	var warn warnings
	warn.unused(d)
	seen.AddConditions("/conditions", d.Stage, &a.Conditions)
	point := a.Conditions.Typical()
	e := s.evaluator(d.Stage)
	defer s.release(e)
	var r evaluate.Result
	e.Eval(&point, &r)
	demandFinite(&r)
	seen.Add("/conditions", d.Stage, &point, &r)
	warn.scale(d, &point, &r)
	warn.typicalControl(d, "/conditions", &point.Control)
	for _, part := range parts {
		s.bands(part)
		for i := range part.Extremes {
			if part.Extremes[i].At != nil {
				s.seeExtreme(part, &part.Extremes[i], &seen)
			}
		}
		part.warnLinear(&warn)
	}
	s.seeSamples(a)
	a.warn(&warn)
	var base *basis
	if r.Status.Figures() {
		base = &basis{&point, &r}
	}
	a.Basis = Basis{s.assumptions(d, e, base), caution.Of(d.Stage, d.At, d.Variables, &seen), warn.list}
}

// seeExtreme looks at a worst point for cautions, and for the conduction mode as it
// is told: the search knows the circuit's own.
func (s *Service) seeExtreme(a *CornersAnswer, x *corners.Extreme, seen *caution.Seen) {
	var r evaluate.Result
	st, point, _ := a.Bound.At(x.At)
	e := s.evaluator(st)
	defer s.release(e)
	e.Eval(&point, &r)
	demandFinite(&r)
	x.Mode = r.Conduction()
	seen.Add("/conditions", st, &point, &r)
}

// seeSamples takes the worst drawn units that are told, each with its conduction
// mode as it is told.
func (s *Service) seeSamples(a *CornersAnswer) {
	if a.Run == nil {
		return
	}
	var r evaluate.Result
	a.Samples = make([][]corners.WorstSample, len(a.Bound.Problem().Targets))
	for t := range a.Samples {
		worst := a.Run.Worst(t)
		a.Samples[t] = slices.Clone(worst[:min(len(worst), a.CornersRequest.Worst)])
		for i := range a.Samples[t] {
			x := &a.Samples[t][i]
			st, point, _ := a.Bound.At(a.Run.Sample(x.Sample, x.Corner))
			e := s.evaluator(st)
			e.Eval(&point, &r)
			s.release(e)
			x.Mode = r.Conduction()
		}
	}
}

// warn says what the reader of an analysis must know.
func (a *CornersAnswer) warn(w *warnings) {
	if a.Conditions.Control.Kind == stage.RegulateTo {
		w.add("tolerance-hidden", "/conditions/control/regulate_to_v", "the output is held at %s V exactly: the tolerances of reference and divider are left out; regulate by feedback to have them in", a.Conditions.Control.Voltage)
	}
	if len(a.Design.Variables) == 0 {
		w.keep(Warning{"no-spreads", a.Design.At, "no number of the stage has a tolerance: only conditions are varied"})
	}
	for _, c := range []struct {
		pointer string
		r       stage.Range
	}{{"/conditions/input_v", a.Conditions.Input}, {"/conditions/ambient_degc", a.Conditions.AmbientDegC}} {
		if c.r.Min == c.r.Max {
			w.add("no-width", c.pointer, "the range has no width: the condition is held at %s", c.r.Min)
		}
	}
	for _, at := range a.Elsewhere {
		w.keep(Warning{"limit-not-looked-at", at, "a limit on transients: rule checks hold it and transients show it; corners leave it open, so the verdict is incomplete at best"})
	}
	if a.Run != nil {
		if a.FullLoad != nil {
			w.keep(Warning{"full-load", "/limits", "limits that hold at full load are looked at by extreme value: the drawn units and their yield leave them out"})
		}
		a.warnSamples(w)
	}
	if len(a.given) == 0 && len(a.Corners) == MostCorners {
		w.add("condition-corners", "/limits", "the worst points have more than %s different conditions: units are evaluated at the first of them", MostCorners)
	}
}

// warnLinear warns where the response was measured to be bent.
func (a *CornersAnswer) warnLinear(w *warnings) {
	for i := range a.Items {
		item := &a.Items[i]
		for _, t := range item.Targets() {
			if a.Linear == nil || a.Linear[t].Trusted() || math.IsNaN(a.Linear[t].Typical) {
				continue
			}
			pointer := "/quantities"
			if item.Limit != nil {
				pointer = item.Limit.At
			}
			bend := a.Linear[t].Curvature
			if math.IsInf(bend, 1) {
				w.keep(Warning{"not-linear", pointer, item.Quantity.Key() + ": an evaluation on the way has no value, so the root-sum-square means nothing here"})
				continue
			}
			w.add("not-linear", pointer, item.Quantity.Key()+": the response leaves its straight line by %s of the tolerance term, more than %s: do not rely on the root-sum-square", bend, corners.StraightEnough)
		}
	}
}

func (a *CornersAnswer) warnSamples(w *warnings) {
	if run, asked := a.Run.Units(), a.Sampling.Samples; run != asked {
		w.keep(Warning{"samples", "/samples", fmt.Sprintf("%d samples asked, %d run: the sampling needs equal sets", asked, run)})
	}
	for i := range a.Items {
		item := &a.Items[i]
		for k := range a.Corners {
			if st := a.Run.Statistics(k, item.Index); st.Far > 0 {
				w.keep(Warning{"sketch", "/samples", fmt.Sprintf("%s: %d values lie far outside the grid of the sketch and stand in mean and deviation at its edge", item.Quantity.Key(), st.Far)})
			}
		}
	}
}
