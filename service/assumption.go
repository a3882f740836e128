package service

import (
	"math"

	"railproof/calc/evaluate"
	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/stage"
)

// Assumption is something an answer rests on that was not given.
type Assumption struct {
	Pointer   string
	Value     float64 // [any] what stood in; NaN where it is unbounded or no number
	Low, High float64 // [any] range over which the real value may lie; NaN: none stated
	Why       string
	Effect    *Effect // nil where nothing was or could be computed
}

// Effect is the computed change of one quantity over an assumption's range.
type Effect struct {
	Quantity quantity.ID
	AtLow    float64 // [any] with the low value; NaN where the stage does not work there
	AtHigh   float64 // [any]
	Change   float64 // [any] greatest change from the answer
}

// telling lists the quantities of which the one that moves most, relative to its
// value, tells how much an assumption matters.
var telling = []quantity.ID{
	quantity.LossTotal, quantity.Efficiency, quantity.OutputMean, quantity.OutputRipplePP, quantity.OutputRippleWithESLPP, quantity.InductorRipplePP,
	quantity.HighSideJunction, quantity.LowSideJunction, quantity.DiodeJunction, quantity.ControllerJunction, quantity.InductorWinding,
	quantity.OutputCapacitorLife, quantity.InputCapacitorLife, quantity.OutputCapacitorTemperature, quantity.InputCapacitorTemperature,
}

// assumptions lists what the answer rests on. base is the point at which effects
// are computed and its result; nil where no point gave figures.
func (s *Service) assumptions(d *Design, e *evaluate.Evaluator, base *basis) []Assumption {
	list := defaults(d, e, base)
	list = append(list, omissions(d)...)
	list = append(list, placeholders(d)...)
	if base != nil {
		list = append(list, s.beyondTables(d, base)...)
	}
	return list
}

// basis is the point at which the effects of assumptions are computed.
type basis struct {
	point  *stage.Point
	result *evaluate.Result
}

// defaults lists every documented default that was used, with its effect.
func defaults(d *Design, e *evaluate.Evaluator, base *basis) []Assumption {
	list := make([]Assumption, 0, len(d.Assumed)+4)
	if len(d.Assumed) == 0 {
		return list
	}
	places := registry{stage: e.Stage()}
	var low, high evaluate.Result
	for _, a := range d.Assumed {
		item := Assumption{Pointer: d.At + "/" + a.Field, Value: finite(a.Value), Low: finite(a.Low), High: finite(a.High), Why: a.Why}
		if base != nil && a.Low != a.High {
			place := places.of(a.Field)
			was := *place
			*place = a.Low
			e.Eval(base.point, &low)
			*place = a.High
			e.Eval(base.point, &high)
			*place = was
			item.Effect = effect(base.result, &low, &high)
		}
		list = append(list, item)
	}
	return list
}

// registry finds the numbers of a stage; it lists them when it is first asked.
type registry struct {
	stage *stage.Stage
	stage.Lookup
}

// of returns the number with the id, which the stage has.
func (r *registry) of(id string) *float64 {
	if r.Fields == nil {
		r.Fields = r.stage.Fields()
	}
	return r.Fields[r.Find(id)].Value
}

// effect picks the quantity that moves most between the results.
func effect(base, low, high *evaluate.Result) *Effect {
	demandFinite(low)
	demandFinite(high)
	var chosen *Effect
	most := -1.0
	for _, id := range telling {
		q, l, h := base.Quantities[id], low.Quantities[id], high.Quantities[id]
		change := math.Max(distance(q, l), distance(q, h))
		relative := change
		if q != 0 {
			relative = change / math.Abs(q)
		}
		if parts.Known(q) && relative > most {
			most, chosen = relative, &Effect{Quantity: id, AtLow: l, AtHigh: h, Change: change}
		}
	}
	return chosen
}

// distance returns |a-b|, 0 where either is unknown.
func distance(a, b float64) float64 {
	if x := math.Abs(a - b); parts.Known(x) {
		return x
	}
	return 0
}

func finite(v float64) float64 {
	if math.IsInf(v, 0) {
		return parts.Unknown
	}
	return v
}

// numberless is an assumption that no number stands for.
func numberless(pointer, why string) Assumption {
	return Assumption{Pointer: pointer, Value: parts.Unknown, Low: parts.Unknown, High: parts.Unknown, Why: why}
}

// omissions lists what the stage leaves out as a whole.
func omissions(d *Design) []Assumption {
	var list []Assumption
	if !d.Stage.Inductor.Core.Present {
		list = append(list, numberless(d.At+"/inductor/core", "core not described: core loss left out"))
	}
	if len(d.Stage.InputCapacitors) == 0 {
		list = append(list, numberless(d.At+"/input_capacitors", "no input capacitors given: input ripple and their losses left out"))
	}
	return list
}

// placeholders lists the parts that are proposals.
func placeholders(d *Design) []Assumption {
	var list []Assumption
	s := d.Stage
	none := func(tail string) {
		list = append(list, numberless(d.At+tail, "placeholder part: its values are proposals, not those of a part"))
	}
	if s.HighSide.Assumed {
		none("/high_side")
	}
	if s.Rectifier == stage.DiodeRectified {
		if s.Diode.Assumed {
			none("/diode")
		}
	} else if s.LowSide.Assumed {
		none("/low_side")
	}
	if s.Inductor.Assumed {
		none("/inductor")
	}
	for i := range s.OutputCapacitors {
		if s.OutputCapacitors[i].Assumed {
			none(bankAt("/output_capacitors/", i))
		}
	}
	for i := range s.InputCapacitors {
		if s.InputCapacitors[i].Assumed {
			none(bankAt("/input_capacitors/", i))
		}
	}
	return list
}
