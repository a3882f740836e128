package wire

import (
	"math"

	"railproof/calc/corners"
	"railproof/calc/evaluate"
	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/stage"
	"railproof/service"
)

// cornersEncoder turns one answer into its shape on the wire.
type cornersEncoder struct {
	w *CornersRequest
	a *service.CornersAnswer
}

// EncodeCorners shows the answer.
func EncodeCorners(w *CornersRequest, a *service.CornersAnswer, head Head) *CornersAnswer {
	e := &cornersEncoder{w, a}
	nominal := a.Asked(a.Conditions.Typical())
	out := &CornersAnswer{
		Head: head, Status: "ok", Outcome: a.Verdict.String(), Seed: Integer(a.Sampling.Seed), Evaluations: Integer(a.Evaluations),
		NominalPoint: EncodePoint(&nominal), NominalStatus: a.NominalEnd.String(), Variables: e.variables(), ConditionCorners: []CornerPoint{},
		Failures: e.failures(), Stage: w.Stage, Conditions: w.Conditions, Limits: w.Limits, Basis: encodeBasis(&a.Basis),
	}
	if a.Status != evaluate.OK {
		out.Status = service.Incomplete.String()
	}
	if s := a.Search; s != nil {
		out.Search = &SearchEffort{Integer(s.Evaluations()), Integer(len(a.Bound.Problem().Coordinates)), s.Covered(a.Confidence), a.Confidence}
	}
	for _, z := range a.Corners {
		out.ConditionCorners = append(out.ConditionCorners, e.corner(z))
	}
	out.Quantities = e.items()
	if a.FullLoad != nil {
		full := &cornersEncoder{w, a.FullLoad}
		out.Quantities, out.Failures = append(out.Quantities, full.items()...), append(out.Failures, full.failures()...)
	}
	if a.Run != nil {
		out.Sampling = nameOf(samplingMethods, a.Sampling.Method)
		out.SamplesAsked, out.SamplesRun = whole(a.Sampling.Samples), whole(a.Run.Units())
		out.Yield, out.WorstSamples = e.yield(), e.worstSamples()
	}
	return out
}

func (e *cornersEncoder) items() []QuantityCorners {
	list := make([]QuantityCorners, len(e.a.Items))
	for i := range list {
		list[i] = e.item(&e.a.Items[i])
	}
	return list
}

// corner shows the conditions at coordinates.
func (e *cornersEncoder) corner(z []float64) CornerPoint {
	_, p, _ := e.a.Bound.At(z)
	c := CornerPoint{Input: p.Input, Load: &p.Load.Current, Ambient: p.AmbientDegC, Age: nonzero(p.AgeRatio)}
	if p.Load.Conductance > 0 {
		r := 1 / p.Load.Conductance
		c.Resistance = &r
	}
	return c
}

// variables lists what is varied: spreads, conditions, drifts, bands.
func (e *cornersEncoder) variables() []Variable {
	list := []Variable{}
	for i := range e.a.Design.Variables {
		v := &e.a.Design.Variables[i]
		list = append(list, Variable{v.Pointer, v.Min, v.Typ, v.Max, UnitOf(v.Pointer), nameOf(distributions, v.Distribution), v.Group, nonzero(v.MatchTol)})
	}
	condition := func(pointer string, r stage.Range) {
		if r.Max > r.Min {
			list = append(list, Variable{Pointer: pointer, Min: r.Min, Typ: r.Typ, Max: r.Max, Unit: UnitOf(pointer), Distribution: "condition"})
		}
	}
	c := &e.a.Conditions
	condition("/conditions/input_v", c.Input)
	condition("/conditions/load/current_a", c.LoadCurrent)
	if g := c.LoadConductance; g.Max > g.Min {
		condition(conductancePointer, stage.Range{Min: 1 / g.Max, Typ: 1 / g.Typ, Max: 1 / g.Min})
	}
	condition("/conditions/ambient_degc", c.AmbientDegC)
	condition("/conditions/age_ratio", c.AgeRatio)
	for i, s := range e.a.Bound.Scales() {
		kind := "model-band"
		if i < len(e.a.Drifts) {
			kind = "drift"
		}
		list = append(list, Variable{Pointer: s.Pointer, Min: s.Low, Typ: 1, Max: s.High, Unit: "1", Distribution: kind})
	}
	return list
}

// conductancePointer names a coordinate that is a conductance inside.
const conductancePointer = "/conditions/load/resistance_ohm"

// at shows what stands at coordinates.
func (e *cornersEncoder) at(z []float64) (*Point, []VariableValue, *Stage) {
	s, p, values := e.a.Bound.At(z)
	p = e.a.Asked(p)
	list := make([]VariableValue, len(values))
	for i, v := range values {
		list[i] = VariableValue{v.Pointer, v.Value, "1"}
		if i < len(e.a.Design.Variables) {
			list[i].Unit = UnitOf(v.Pointer)
		}
	}
	if !isTrue(e.w.Stages) {
		return EncodePoint(&p), list, nil
	}
	return EncodePoint(&p), list, EncodeStage(s, nil)
}

// named tells which variables a coordinate moves.
func (e *cornersEncoder) named(coordinate int) Named {
	pointers := e.a.Bound.Pointers(coordinate)
	n := Named{Pointer: pointers[0], With: pointers[1:]}
	if len(n.With) == 0 {
		n.With = nil
	}
	if set := e.a.Bound.Spreads(); coordinate < set.Len() {
		n.Residual = mark(set.Coordinates()[coordinate].Residual)
	}
	return n
}

func (e *cornersEncoder) failures() []FailureCount {
	list := []FailureCount{}
	if e.a.Search != nil {
		for _, f := range e.a.Search.Failures() {
			c := FailureCount{Status: f.Status.String(), Method: "extreme-value", Count: f.Count}
			c.Point, c.Variables, c.Stage = e.at(f.At)
			list = append(list, c)
		}
	}
	if e.a.Run != nil {
		for _, f := range e.a.Run.Failures() {
			c := FailureCount{Status: f.Status.String(), Method: "monte-carlo", Count: f.Count, First: whole(f.First), Corner: whole(f.Corner)}
			c.Point, c.Variables, c.Stage = e.at(e.a.Run.Sample(f.First, f.Corner))
			list = append(list, c)
		}
	}
	return list
}

func (e *cornersEncoder) yield() *Yield {
	y := e.a.Run.Yield(e.a.Confidence)
	w := &Yield{Samples: y.Units, Passes: y.Passes, Share: y.Share, Low: y.Low, High: y.High, Confidence: e.a.Confidence, Interval: "replicates"}
	if y.Exact {
		w.Interval = "clopper-pearson"
		w.WilksSamples = whole(corners.WilksSize(e.a.Coverage, e.a.Confidence, 1))
	}
	return w
}

func (e *cornersEncoder) worstSamples() []WorstSample {
	list := []WorstSample{}
	for i := range e.a.Items {
		item := &e.a.Items[i]
		info, _ := quantity.Of(item.Quantity)
		for _, t := range item.Targets() {
			d := e.a.Bound.Problem().Targets[t].Direction
			for _, s := range e.a.Samples[t] {
				list = append(list, WorstSample{item.Quantity.Key(), targetSides[d], s.Sample, s.Corner, e.sample(&s, info.Unit)})
			}
		}
	}
	return list
}

func (e *cornersEncoder) sample(s *corners.WorstSample, unit string) *WorstPoint {
	w := &WorstPoint{Value: &s.Value, Unit: unit, FoundBy: origins[corners.FromSample], Sample: whole(s.Sample)}
	w.Point, w.Variables, w.Stage = e.at(e.a.Run.Sample(s.Sample, s.Corner))
	w.Status, w.Mode = s.Status.String(), modeNames[s.Mode]
	return w
}

var targetSides = map[corners.Direction]string{corners.Least: "least", corners.Greatest: "greatest"}

var origins = map[corners.Origin]string{
	corners.FromNominal: "nominal", corners.FromConditionCorner: "condition-corner", corners.FromVertex: "vertex", corners.FromSearch: "search", corners.FromSample: "sample",
}

// ordinary returns the number's place, or nil for one that JSON does not have.
func ordinary(v float64) *float64 {
	if !parts.Known(v) || math.IsInf(v, 0) {
		return nil
	}
	return &v
}
