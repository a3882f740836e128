package service

import (
	"context"
	"math"
	"strings"

	"railproof/calc/evaluate"
	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/sizing"
	"railproof/calc/stage"
)

// sizingAssumptions lists what stood in for what the requirement leaves open. A
// target's effect is what changes when the stage is sized for either end of its
// range; that of a value of the draft, what changes when the draft has it.
func (s *Service) sizingAssumptions(ctx context.Context, r *SizingRequest, a *sizing.Answer) ([]Assumption, error) {
	assumed := append(append([]stage.Assumed(nil), r.Assumed...), a.Assumed...)
	list := make([]Assumption, len(assumed))
	err := inChunks(ctx, s.cores, len(assumed), 1, s.workers, noWorkspace, keepNothing, func(_ struct{}, i, _ int) {
		f := &assumed[i]
		list[i] = Assumption{Pointer: fieldPointer(r.At, f.Field), Value: finite(f.Value), Low: finite(f.Low), High: finite(f.High), Why: f.Why}
		if _, ofDraft := strings.CutPrefix(f.Field, "stage/"); ofDraft {
			list[i].Pointer = "/" + f.Field
			list[i].Effect = s.draftEffect(a, f)
		} else if base := chosenRow(a); base != nil && f.Low != f.High {
			list[i].Effect = rowEffect(base, s.resized(ctx, r, f, f.Low, a.Frequency), s.resized(ctx, r, f, f.High, a.Frequency))
		}
	})
	if err != nil {
		return nil, err
	}
	if a.Stage != nil {
		list = append(list, omissions(&Design{At: "/stage", Stage: a.Stage})...)
	}
	return list, nil
}

// draftEffect evaluates the draft at its typical point with an assumed value of it
// at either end of its range.
func (s *Service) draftEffect(a *sizing.Answer, f *stage.Assumed) *Effect {
	if a.Stage == nil || f.Low == f.High {
		return nil
	}
	e := s.evaluator(a.Stage)
	defer s.release(e)
	place := e.Stage().Field(strings.TrimPrefix(f.Field, "stage/"))
	if place == nil {
		return nil
	}
	var base, low, high evaluate.Result
	e.Eval(&a.Point, &base)
	*place = f.Low
	e.Eval(&a.Point, &low)
	*place = f.High
	e.Eval(&a.Point, &high)
	return effect(&base, &low, &high)
}

// resized sizes once more with another value in an assumption's place; nil where
// that is infeasible or the value has no place in the requirement.
func (s *Service) resized(ctx context.Context, r *SizingRequest, f *stage.Assumed, value, frequency float64) *sizing.Row {
	q := r.Requirement
	place := requirementField(&q, f.Field)
	if place == nil {
		return nil
	}
	*place = value
	a := s.sized(ctx, &q, r.Choices, frequency)
	return chosenRow(&a)
}

// chosenRow returns the row of the frequency that the answer is for.
func chosenRow(a *sizing.Answer) *sizing.Row {
	for i := range a.Sweep {
		if a.Sweep[i].Frequency == a.Frequency && a.Sweep[i].Status.OK() {
			return &a.Sweep[i]
		}
	}
	return nil
}

// rowEffect picks the figure of a row that moves most, relative to its value.
func rowEffect(base, low, high *sizing.Row) *Effect {
	var chosen *Effect
	most := -1.0
	for _, f := range []struct {
		id quantity.ID
		of func(*sizing.Row) float64
	}{
		{quantity.LossTotal, func(r *sizing.Row) float64 { return r.Loss }},
		{quantity.Efficiency, func(r *sizing.Row) float64 { return r.Efficiency }},
		{quantity.OutputRipplePP, func(r *sizing.Row) float64 { return r.OutputRipple }},
		{quantity.InductorRipplePP, func(r *sizing.Row) float64 { return r.InductorRipple }},
	} {
		at := func(r *sizing.Row) float64 {
			if r == nil {
				return parts.Unknown
			}
			return f.of(r)
		}
		q, l, h := f.of(base), at(low), at(high)
		if change := math.Max(distance(q, l), distance(q, h)); parts.Known(q) && change/math.Abs(q) > most {
			most, chosen = change/math.Abs(q), &Effect{Quantity: f.id, AtLow: l, AtHigh: h, Change: change}
		}
	}
	return chosen
}

// requirementField returns the place of a number of the requirement, nil for one
// that it does not hold.
func requirementField(r *stage.Requirement, field string) *float64 {
	switch field {
	case "input/typ_v":
		return &r.Input.Typ
	case "input/source_ohm":
		return &r.SourceResistance
	case "output/tolerance_ratio":
		return &r.OutputTolerance
	case "load/min_a":
		return &r.LoadCurrent.Min
	case "load/typ_a":
		return &r.LoadCurrent.Typ
	case "ambient/typ_degc":
		return &r.AmbientDegC.Typ
	case "targets/inductor_ripple_ratio":
		return &r.Targets.InductorRippleRatio
	case "targets/output_ripple_pp_v":
		return &r.Targets.OutputRipple
	case "targets/input_ripple_pp_v":
		return &r.Targets.InputRipple
	case "targets/load_step/slew_a_per_s":
		return &r.Targets.LoadStep.Slew
	case "targets/efficiency_ratio":
		return &r.Targets.Efficiency
	case "targets/junction_degc":
		return &r.Targets.JunctionDegC
	}
	return nil
}
