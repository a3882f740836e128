package service

import (
	"fmt"
	"math"
	"strconv"

	"railproof/calc/evaluate"
	"railproof/calc/losses"
	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/stage"
)

// outcome evaluates one point and adds where the stage would work if it does not.
func outcome(e *evaluate.Evaluator, p *stage.Point) *Outcome {
	o := new(Outcome)
	e.Eval(p, &o.Result)
	demandFinite(&o.Result)
	switch o.Status {
	case evaluate.Runaway:
		o.Onset = onset(e, p)
		fallthrough
	case evaluate.OverTemperature, evaluate.DropOut, evaluate.TooShortOnTime, evaluate.NoOperatingPoint:
		o.Nearest = nearest(e, p, &o.Result)
	}
	o.Detail = describe(e.Stage(), p, o)
	return o
}

// demandFinite turns a result with an infinite figure into one that did not
// converge: such a figure is no answer, and has no JSON either. NaN is the mark
// of a quantity that does not apply.
func demandFinite(r *evaluate.Result) {
	for i := range r.Quantities {
		if math.IsInf(r.Quantities[i], 0) {
			r.Status = evaluate.NotConverged
		}
	}
	for i := range r.Losses.Items[:r.Losses.N] {
		if p := r.Losses.Items[i].Power; math.IsInf(p, 0) || math.IsNaN(p) {
			r.Status = evaluate.NotConverged
		}
	}
	if !r.Status.Figures() {
		for i := range r.Quantities {
			r.Quantities[i] = math.NaN()
		}
		for i := range r.PartDegC {
			r.PartDegC[i] = math.NaN()
		}
		r.Losses.N = 0
	}
}

func describe(s *stage.Stage, p *stage.Point, o *Outcome) string {
	q := &o.Quantities
	switch o.Status {
	case evaluate.OverTemperature:
		return "a part's equilibrium temperature is above its rating; every figure is given"
	case evaluate.DropOut:
		return fmt.Sprintf("the greatest duty ratio, %s, reaches %s V; figures are at that duty ratio", short(q[quantity.DutyRatio]), short(q[quantity.OutputMean]))
	case evaluate.TooShortOnTime:
		return fmt.Sprintf("the least on-time, %s s, already delivers more than was asked for; figures are at that on-time", short(s.Controller.MinOnTime))
	case evaluate.NoOperatingPoint:
		return "the load drags the output to zero or below"
	case evaluate.Runaway:
		return "no stable thermal equilibrium exists at this point"
	case evaluate.NotConverged:
		return fmt.Sprintf("no solution was found within the iteration limit at %s V input and %s degC ambient", short(p.Input), short(p.AmbientDegC))
	}
	return ""
}

// short writes a number for a sentence.
func short(v float64) string { return strconv.FormatFloat(v, 'g', 4, 64) }

// Life returns the expected life of a capacitor bank [s]; parts.Unknown where it
// has none, as every other part.
func (o *Outcome) Life(p losses.Part) float64 {
	switch {
	case p >= losses.InputCapacitor:
		return o.Quantities[quantity.InputCapacitorLife+quantity.ID(p-losses.InputCapacitor)]
	case p >= losses.OutputCapacitor:
		return o.Quantities[quantity.OutputCapacitorLife+quantity.ID(p-losses.OutputCapacitor)]
	}
	return parts.Unknown
}

// RatedDegC returns the greatest temperature the data sheet allows for a part
// [degC]; parts.Unknown where it does not say.
func RatedDegC(s *stage.Stage, p losses.Part) float64 {
	switch {
	case p == losses.HighSide:
		return s.HighSide.Rating.JunctionDegC
	case p == losses.LowSide:
		return s.LowSide.Rating.JunctionDegC
	case p == losses.Diode:
		return s.Diode.Rating.JunctionDegC
	case p == losses.Inductor:
		return s.Inductor.Rating.WindingDegC
	case p == losses.Controller:
		return s.Controller.Rating.JunctionDegC
	case p >= losses.InputCapacitor && int(p-losses.InputCapacitor) < len(s.InputCapacitors):
		return s.InputCapacitors[p-losses.InputCapacitor].Rating.TemperatureDegC
	case p >= losses.OutputCapacitor && p < losses.InputCapacitor && int(p-losses.OutputCapacitor) < len(s.OutputCapacitors):
		return s.OutputCapacitors[p-losses.OutputCapacitor].Rating.TemperatureDegC
	}
	return math.NaN()
}
