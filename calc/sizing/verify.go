package sizing

import (
	"math"

	"railproof/calc/evaluate"
	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/stage"
)

// Verify evaluates the draft stage on the exact engine and fills in Checks: for
// every limit on a steady-state or loss quantity the worst value over the corners of
// the conditions, each spread at the end that is worse for that quantity there.
//
// Input voltages are both ends, the typical one and those at which a window found
// its worst case inside the range; loads, ambient and age are both ends. Which end
// of a spread is worse is found from the quantity itself, by moving one spread at a
// time from its typical value at each input and load.
func (a *Answer) Verify() {
	for range a.Verifying {
	}
}

// Verifying is Verify for a caller that looks about in between: it yields after
// every input and load. Left before its end it leaves no checks.
func (a *Answer) Verifying(yield func() bool) {
	a.Checks = nil
	if !a.Status.OK() {
		return
	}
	v := newVerifier(a)
	for _, l := range a.Limits {
		if g, _ := quantity.Of(l.Quantity); g.Group == quantity.Loop || g.Group == quantity.Transient {
			continue
		}
		v.checks = append(v.checks, Check{Limit: l, Worst: math.NaN(), Met: true})
	}
	for _, input := range v.inputs() {
		for _, load := range ends(a.Conditions.LoadCurrent) {
			v.point.Input, v.point.Load.Current = input, load
			v.sense()
			for _, v.point.AmbientDegC = range ends(a.Conditions.AmbientDegC) {
				for _, v.point.AgeRatio = range ends(a.Conditions.AgeRatio) {
					v.visit()
				}
			}
			if !yield() {
				return
			}
		}
	}
	a.Checks, a.Worst = v.checks, v.worst
}

// ends returns both ends of a range, or the one value.
func ends(r stage.Range) []float64 {
	if r.Min == r.Max {
		return []float64{r.Max}
	}
	return []float64{r.Max, r.Min}
}

// verifier holds one draft stage, its spreads and the checks.
type verifier struct {
	answer *Answer
	eval   *evaluate.Evaluator
	value  []*float64 // the stage's numbers, in the order of the spreads
	rises  [][]bool   // by check, by spread: the quantity rises with the value
	point  stage.Point
	result evaluate.Result
	checks []Check
	worst  evaluate.Status
}

func newVerifier(a *Answer) *verifier {
	v := &verifier{answer: a, eval: evaluate.Prepare(a.Stage), worst: evaluate.OK}
	values := numbers(v.eval.Stage())
	for i := range a.Spreads {
		v.value = append(v.value, values[a.Spreads[i].Field])
	}
	v.point = stage.Point{SourceResistance: a.Conditions.SourceResistance, PartTemperatureDegC: parts.Unknown, Control: a.Conditions.Control}
	return v
}

// inputs lists the input voltages looked at.
func (v *verifier) inputs() []float64 {
	r := v.answer.Conditions.Input
	list := []float64{r.Min, r.Max}
	add := func(x float64) {
		if !(x > r.Min && x < r.Max) {
			return
		}
		for _, y := range list {
			if math.Abs(x-y) < 1e-3*y {
				return
			}
		}
		list = append(list, x)
	}
	for i := range v.answer.Windows {
		for _, b := range v.answer.Windows[i].Bounds {
			add(b.Corner.Input)
		}
	}
	add(r.Typ)
	return list
}

// sense finds, at the present input and load, which checked quantity rises with
// which spread.
func (v *verifier) sense() {
	p := v.point
	p.AmbientDegC, p.AgeRatio = v.answer.Conditions.AmbientDegC.Max, v.answer.Conditions.AgeRatio.Max
	spreads := v.answer.Spreads
	v.rises = make([][]bool, len(v.checks))
	for c := range v.rises {
		v.rises[c] = make([]bool, len(spreads))
	}
	var low evaluate.Result
	for i := range spreads {
		*v.value[i] = spreads[i].Min
		v.eval.Eval(&p, &low)
		*v.value[i] = spreads[i].Max
		v.eval.Eval(&p, &v.result)
		*v.value[i] = spreads[i].Typ
		for c := range v.checks {
			id := v.checks[c].Quantity
			v.rises[c][i] = v.result.Quantities[id] >= low.Quantities[id]
		}
	}
}

// visit evaluates, at the present condition corner, the worst vertex of each check.
func (v *verifier) visit() {
	for c := range v.checks {
		check := &v.checks[c]
		if check.FullLoad && v.point.Load.Current < v.answer.Conditions.LoadCurrent.Max {
			continue
		}
		if !math.IsNaN(check.Most) {
			v.vertex(check, v.rises[c], true)
		}
		if !math.IsNaN(check.Least) {
			v.vertex(check, v.rises[c], false)
		}
	}
	for i, s := range v.answer.Spreads {
		*v.value[i] = s.Typ
	}
}

// vertex evaluates the vertex at which the quantity is expected to be greatest or
// least.
func (v *verifier) vertex(check *Check, rises []bool, upward bool) {
	for i, s := range v.answer.Spreads {
		*v.value[i] = s.Min
		if rises[i] == upward {
			*v.value[i] = s.Max
		}
	}
	v.eval.Eval(&v.point, &v.result)
	if v.result.Status > v.worst {
		v.worst = v.result.Status
	}
	x := v.result.Quantities[check.Quantity]
	met := v.result.Status.Figures() && v.result.Status != evaluate.DropOut && v.result.Status != evaluate.TooShortOnTime && check.holds(x)
	if excess := check.excess(x); math.IsNaN(check.Worst) || excess > check.excess(check.Worst) || check.Met && !met {
		check.Worst, check.Corner = x, v.point
	}
	check.Met = check.Met && met
}

// holds reports whether a value keeps the limit.
func (l *Limit) holds(x float64) bool {
	return !(x > l.Most) && !(x < l.Least) && !math.IsNaN(x)
}

// excess returns how far a value has gone towards or beyond the limit, the larger
// the worse [any].
func (l *Limit) excess(x float64) float64 {
	switch {
	case math.IsNaN(l.Least):
		return x - l.Most
	case math.IsNaN(l.Most):
		return l.Least - x
	}
	return math.Max(x-l.Most, l.Least-x)
}
