package service

import (
	"math"

	"railproof/calc/corners"
	"railproof/calc/evaluate"
	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/stage"
)

// bandsOf returns the uncertainty bands of the loss models that do something in
// the stage.
func bandsOf(s *stage.Stage) []corners.Scale {
	var list []corners.Scale
	fields := stage.Lookup{Fields: s.Fields()}
	for _, band := range corners.ModelBands(s) {
		bears := false
		for _, field := range band.Fields {
			i := fields.Find(field)
			bears = bears || i >= 0 && parts.Known(*fields.Fields[i].Value) && *fields.Fields[i].Value != 0
		}
		if bears && band.High > band.Low {
			list = append(list, band)
		}
	}
	return list
}

// bandAt returns how far the model bands could move a quantity for the worse at a
// point, every band at its worse end: the sum of what each does alone.
func (s *Service) bandAt(st *stage.Stage, p *stage.Point, id quantity.ID, d corners.Direction) float64 {
	var base, moved evaluate.Result
	e := s.evaluator(st)
	defer s.release(e)
	e.Eval(p, &base)
	fields := stage.Lookup{Fields: e.Stage().Fields()}
	sum := 0.0
	for _, band := range bandsOf(st) {
		harm := 0.0
		var numbers []*float64
		var typical []float64
		for _, id := range band.Fields {
			v := fields.Fields[fields.Find(id)].Value
			numbers, typical = append(numbers, v), append(typical, *v)
		}
		for _, factor := range []float64{band.Low, band.High} {
			for i, v := range numbers {
				*v = typical[i] * factor
			}
			e.Eval(p, &moved)
			change := moved.Quantities[id] - base.Quantities[id]
			if d == corners.Least {
				change = -change
			}
			if !moved.Status.Figures() {
				change = math.NaN()
			}
			harm = max(harm, change)
		}
		for i, v := range numbers {
			*v = typical[i]
		}
		sum += harm
	}
	return sum
}

// bands fills in the bands of every limited line at its worst point.
func (s *Service) bands(a *CornersAnswer) {
	if a.ModelBands || !a.Methods.ExtremeValue {
		return
	}
	for i := range a.Items {
		item := &a.Items[i]
		info, _ := quantity.Of(item.Quantity)
		if item.YieldLimit < 0 || info.Group != quantity.SteadyState && info.Group != quantity.Losses {
			continue
		}
		for _, t := range item.Targets() {
			x := &a.Extremes[t]
			if x.At == nil || !(math.Abs(item.Limit.margin(x.Value)) <= math.Abs(item.Margin)) {
				continue
			}
			st, point, _ := a.Bound.At(x.At)
			point = a.Asked(point)
			item.Band = s.bandAt(st, &point, item.Quantity, x.Direction)
		}
	}
}

// WithinBand reports whether a line's margin is smaller than its band.
func (i *CornersItem) WithinBand(worst float64) bool {
	if i.Limit == nil || math.IsNaN(i.Band) {
		return false
	}
	nearest := math.Inf(1)
	for _, bound := range []float64{i.Limit.Min, i.Limit.Max} {
		if d := math.Abs(worst - bound); d < nearest {
			nearest = d
		}
	}
	return nearest < i.Band
}

// Worst returns the worst value of the side on which a line's margin is least;
// NaN where it has none.
func (a *CornersAnswer) Worst(i *CornersItem) float64 {
	v, least := math.NaN(), math.NaN()
	for _, t := range i.Targets() {
		x := a.worst(t)
		m := math.Inf(1)
		if i.Limit != nil {
			m = i.Limit.margin(x)
		}
		if !(m >= least) {
			v, least = x, m
		}
	}
	return v
}
