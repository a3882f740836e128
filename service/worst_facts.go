package service

import (
	"encoding/binary"
	"math"
	"strings"

	"railproof/calc/corners"
	"railproof/calc/evaluate"
	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/rules"
	"railproof/calc/stage"
)

// blindness is told of a quantity that had no value at a point at which the stage
// works: a loop that is unstable there, a step from which it does not recover.
const blindness = "a value at every corner: the loop is unstable or cannot be followed at one"

// gather turns the worst points of a pass into facts of the case.
func (s *Service) gather(r *worstRequest, w *worstCase, p *worstPass) {
	into := w.Extremes
	if p.full {
		into = w.FullLoad
	}
	places := map[string]*worstPlace{}
	for t := range p.found {
		f := &p.found[t]
		id := p.ids[f.Quantity]
		x, known := into[id]
		if !known {
			none := rules.Worst{Value: parts.Unknown}
			x = rules.Extreme{Least: none, Greatest: none}
		}
		if p.blind[t] {
			w.Absent[id] = []string{blindness}
		} else if f.At != nil {
			place := s.place(r, w, p, f.At, places)
			one := rules.Worst{Value: f.Value, By: p.by, Corner: place.corner, Beyond: s.tablesBehind(place.design, &place.point, &place.result, id)}
			one.Under = underOf(place.under, r.design.At, id, f.Value)
			if p.kind == electrical {
				one.Low, one.High, one.Banded = place.band(id, f.Value)
			}
			if f.Direction == corners.Least {
				x.Least = one
			} else {
				x.Greatest = one
			}
		}
		into[id] = x
	}
	for i := range p.failures {
		f := &p.failures[i]
		st, point, _ := p.bound.At(f.At)
		w.Statuses = append(w.Statuses, rules.PointStatus{Status: f.Status, Corner: w.corner(point)})
		var result evaluate.Result
		e := s.evaluator(st)
		e.Eval(&point, &result)
		s.release(e)
		demandFinite(&result)
		w.seen.Add(r.at, st, &point, &result)
	}
}

// worstPlace is what a stage does at one worst point.
type worstPlace struct {
	design    *Design // with every tolerance put in
	point     stage.Point
	corner    int
	result    evaluate.Result
	low, high evaluate.Result // with the loss models at either end of their bands
	under     []assumedEnds
}

func (s *Service) place(r *worstRequest, w *worstCase, p *worstPass, z []float64, known map[string]*worstPlace) *worstPlace {
	key := string(appendFloats(nil, z))
	if place := known[key]; place != nil {
		return place
	}
	st, point, _ := p.bound.At(z)
	place := &worstPlace{design: &Design{At: r.design.At, Stage: st}, point: point, corner: w.corner(point)}
	known[key] = place
	e := s.evaluator(st)
	defer s.release(e)
	e.Eval(&point, &place.result)
	demandFinite(&place.result)
	w.seen.Add(r.at, st, &point, &place.result)
	bands, own, typical := bandsOf(st), numbersOf(e.Stage()), numbersOf(st)
	for _, end := range []struct {
		result *evaluate.Result
		of     func(*corners.Scale) float64
	}{{&place.low, func(b *corners.Scale) float64 { return b.Low }}, {&place.high, func(b *corners.Scale) float64 { return b.High }}} {
		for i := range bands {
			for _, field := range bands[i].Fields {
				*own[field] = *typical[field] * end.of(&bands[i])
			}
		}
		e.Eval(&point, end.result)
		demandFinite(end.result)
	}
	for i := range bands {
		for _, field := range bands[i].Fields {
			*own[field] = *typical[field]
		}
	}
	place.under = underAssumed(e, &point, r.design.Assumed, func(field string) corners.Extension {
		if p.kind == electrical || !shapesLoop(field) {
			return nil
		}
		return extensionFor(p.ids, nil, newLoadStep(r.requirement))
	})
	return place
}

// assumedEnds is what comes of a point with a number that nobody gave at either end of
// its stated range.
type assumedEnds struct {
	field string
	ends  [2]quantity.Vector
}

// underAssumed evaluates a point with every assumed number at both ends of its range.
// extend returns what computes more than the evaluator for a field; nil for none.
func underAssumed(e *evaluate.Evaluator, point *stage.Point, assumed []stage.Assumed, extend func(field string) corners.Extension) []assumedEnds {
	var list []assumedEnds
	own := numbersOf(e.Stage())
	var result evaluate.Result
	for _, a := range assumed {
		at := own[a.Field]
		if at == nil || !parts.Known(finite(a.Low)) || !parts.Known(finite(a.High)) || !(a.Low < a.High) {
			continue
		}
		one, kept, more := assumedEnds{field: a.Field}, *at, extend(a.Field)
		for k, v := range [2]float64{a.Low, a.High} {
			*at = v
			e.Eval(point, &result)
			demandFinite(&result)
			if more != nil && result.Status.Figures() {
				more(e, point, &result)
			}
			one.ends[k] = result.Quantities
		}
		*at = kept
		list = append(list, one)
	}
	return list
}

// shapesLoop reports whether a number of the stage is one that loop and load step are
// made of.
func shapesLoop(field string) bool {
	return strings.HasPrefix(field, "output_capacitors/") && !strings.Contains(field, "/thermal/") && !strings.Contains(field, "/life/") ||
		strings.HasPrefix(field, "modulator/") || strings.HasPrefix(field, "compensator/") || strings.HasPrefix(field, "feedback/")
}

// underOf returns what a quantity is at the ends of those assumed numbers that bear on
// it; nil where none does.
func underOf(list []assumedEnds, at string, id quantity.ID, value float64) rules.Under {
	var under rules.Under
	for i := range list {
		a := &list[i]
		low, high := a.ends[0][id], a.ends[1][id]
		bears := func(end float64) bool { return math.IsNaN(end) || bearsOn(id, value, end-value) }
		if kindOf(id) != electrical && !shapesLoop(a.field) || math.IsNaN(value) || !bears(low) && !bears(high) {
			continue
		}
		if under == nil {
			under = rules.Under{}
		}
		under[at+"/"+a.field] = [2]float64{low, high}
	}
	return under
}

// numbersOf returns where a stage keeps each of its numbers.
func numbersOf(s *stage.Stage) map[string]*float64 {
	m := make(map[string]*float64, 96)
	for _, f := range s.Fields() {
		m[f.ID] = f.Value
	}
	return m
}

func appendFloats(b []byte, list []float64) []byte {
	for _, v := range list {
		b = binary.LittleEndian.AppendUint64(b, math.Float64bits(v))
	}
	return b
}

// bearsShare is the relative change from which a model band or a table's continuation
// counts as bearing on a value; for a temperature it is a tenth of a kelvin.
const bearsShare = 1e-3 // [1]

func bearsOn(id quantity.ID, value, change float64) bool {
	if info, _ := quantity.Of(id); info.Unit == "Cel" {
		return math.Abs(change) > 0.1
	}
	return math.Abs(change) > bearsShare*math.Abs(value)
}

// band returns the value with every loss model at the lower and at the upper end of
// its band.
func (p *worstPlace) band(id quantity.ID, value float64) (low, high float64, banded bool) {
	low, high = p.low.Quantities[id], p.high.Quantities[id]
	banded = bearsOn(id, value, low-value) || bearsOn(id, value, high-value)
	return low, high, banded
}

// tablesBehind returns the pointers of the tables that are read beyond their ends
// at a point and on which the value rests: it would be another if they stayed at
// their last entries.
func (s *Service) tablesBehind(d *Design, p *stage.Point, r *evaluate.Result, id quantity.ID) []string {
	if !r.Status.Figures() {
		return nil
	}
	var list []string
	for _, use := range tablesBeyond(d.Stage, &basis{p, r}) {
		if kindOf(id) != electrical {
			if use.shapesLoop() {
				list = append(list, d.At+use.tail)
			}
			continue
		}
		if parts.Known(r.Quantities[id]) && bearsOn(id, r.Quantities[id], r.Quantities[id]-s.flat(d, p, use, id)) {
			list = append(list, d.At+use.tail)
		}
	}
	return list
}

// flat returns a quantity with a table held at its ends.
func (s *Service) flat(d *Design, p *stage.Point, use tableUse, id quantity.ID) float64 {
	fixed := d.Stage.Clone()
	t := use.table(fixed)
	*t = flatBeyond(*t)
	var r evaluate.Result
	e := s.evaluator(fixed)
	defer s.release(e)
	e.Eval(p, &r)
	demandFinite(&r)
	return r.Quantities[id]
}

// shapesLoop reports whether a table sets what a loop is made of: the inductance or
// an output capacitor.
func (u *tableUse) shapesLoop() bool {
	return u.tail == "/inductor/inductance_at_current" || strings.HasPrefix(u.tail, "/output_capacitors/")
}
