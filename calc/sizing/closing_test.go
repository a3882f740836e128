package sizing_test

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"github.com/stretchr/testify/assert"
	"github.com/stretchr/testify/require"

	"railproof/calc/evaluate"
	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/sizing"
	"railproof/calc/stage"
)

const requirements = 200

// box is a draft stage with its spreads as a box, evaluated at any vertex and any
// condition.
type box struct {
	answer *sizing.Answer
	eval   *evaluate.Evaluator
	value  []*float64
	point  stage.Point
	result evaluate.Result
}

func newBox(a *sizing.Answer) *box {
	b := &box{answer: a, eval: evaluate.Prepare(a.Stage)}
	for _, s := range a.Spreads {
		b.value = append(b.value, b.eval.Stage().Field(s.Field))
	}
	b.point = stage.Point{SourceResistance: a.Conditions.SourceResistance, PartTemperatureDegC: parts.Unknown, Control: a.Conditions.Control}
	return b
}

// at evaluates with every spread at the end that up names.
func (b *box) at(up func(i int) bool) {
	for i, s := range b.answer.Spreads {
		*b.value[i] = s.Min
		if up(i) {
			*b.value[i] = s.Max
		}
	}
	b.eval.Eval(&b.point, &b.result)
}

// directions tells for each limit and spread whether the quantity rises with it, at
// the present condition.
func (b *box) directions() [][]bool {
	rises := make([][]bool, len(b.answer.Limits))
	for k := range rises {
		rises[k] = make([]bool, len(b.value))
	}
	reset := func() {
		for i, s := range b.answer.Spreads {
			*b.value[i] = s.Typ
		}
	}
	for i, s := range b.answer.Spreads {
		reset()
		*b.value[i] = s.Min
		b.eval.Eval(&b.point, &b.result)
		low := b.result.Quantities
		*b.value[i] = s.Max
		b.eval.Eval(&b.point, &b.result)
		for k, l := range b.answer.Limits {
			rises[k][i] = b.result.Quantities[l.Quantity] > low[l.Quantity]
		}
	}
	return rises
}

// corners calls begin at every combination of five input voltages and both ends of
// load, then visit at those of ambient and age too.
func (b *box) corners(begin, visit func()) {
	c := b.answer.Conditions
	for k := range 5 {
		b.point.Input = c.Input.Min + float64(k)/4*(c.Input.Max-c.Input.Min)
		for _, b.point.Load.Current = range [2]float64{c.LoadCurrent.Min, c.LoadCurrent.Max} {
			b.point.AmbientDegC, b.point.AgeRatio = c.AmbientDegC.Max, 1
			begin()
			for _, b.point.AmbientDegC = range [2]float64{c.AmbientDegC.Min, c.AmbientDegC.Max} {
				for _, b.point.AgeRatio = range [2]float64{0, 1} {
					visit()
				}
			}
		}
	}
}

// proven are the limits whose keeping sizing promises over the whole box.
var proven = map[quantity.ID]bool{
	quantity.OutputRipplePP: true, quantity.OutputRippleWithESLPP: true, quantity.InputRipplePP: true, quantity.InductorRipplePP: true, quantity.InductorPeak: true, quantity.BoundaryLoad: true,
	quantity.LoadVoltage: true, quantity.HighSideJunction: true, quantity.LowSideJunction: true, quantity.DiodeJunction: true, quantity.Efficiency: true,
}

// keeps reports whether the present evaluation keeps a limit, and says what it saw.
func (b *box) keeps(l *sizing.Limit) (bool, string) {
	x := b.result.Quantities[l.Quantity]
	ok := b.result.Status == evaluate.OK && !math.IsNaN(x) && !(x > l.Most*(1+1e-9)) && !(x < l.Least-1e-9*math.Abs(l.Least))
	return ok, fmt.Sprintf("%s is %.6g, limit [%g, %g], status %s, at %.4g V %.4g A %g degC age %g", l.Quantity.Key(), x, l.Least, l.Most, b.result.Status, b.point.Input, b.point.Load.Current, b.point.AmbientDegC, b.point.AgeRatio)
}

func TestClosingTheLoop(t *testing.T) {
	t.Parallel()
	feasible := 0
	for k := range generated() {
		req := generate(k)
		require.NoError(t, req.Check(), k)
		a := sized()[k]
		if !a.Status.OK() {
			require.NotEmpty(t, a.Conflicts)
			for _, c := range a.Conflicts {
				confirm(t, k, req, &c)
			}
			continue
		}
		feasible++
		a.Verify()
		require.NoError(t, a.Stage.Check(), k)
		assert.Empty(t, a.Stage.Clone().ApplyDefaults(), "draft %d leaves numbers to defaults", k)
		assert.Equal(t, evaluate.OK, a.Worst)
		for _, c := range a.Checks {
			assert.True(t, c.Met, "%d: check %s: %g", k, c.Quantity.Key(), c.Worst)
		}
		b := newBox(&a)
		var rises [][]bool
		b.corners(func() { rises = b.directions() }, func() {
			for i := range a.Limits {
				l := &a.Limits[i]
				if !proven[l.Quantity] || l.FullLoad && b.point.Load.Current < a.Conditions.LoadCurrent.Max {
					continue
				}
				for _, upward := range [2]bool{true, false} {
					if upward && math.IsNaN(l.Most) || !upward && math.IsNaN(l.Least) {
						continue
					}
					b.at(func(v int) bool { return rises[i][v] == upward })
					ok, saw := b.keeps(l)
					assert.True(t, ok, "%d: %s", k, saw)
				}
			}
		})
		randomVertices(t, k, b)
	}
	assert.GreaterOrEqual(t, feasible, generated()*7/10, "feasible requirements")
	t.Logf("%d of %d feasible", feasible, generated())
}

// randomVertices looks for a vertex and condition that the directions missed.
func randomVertices(t *testing.T, k int, b *box) {
	r := rand.New(rand.NewPCG(7, uint64(k)))
	c := b.answer.Conditions
	within := func(x stage.Range) float64 { return x.Min + r.Float64()*(x.Max-x.Min) }
	for range 60 {
		b.point.Input, b.point.Load.Current, b.point.AmbientDegC, b.point.AgeRatio = within(c.Input), within(c.LoadCurrent), within(c.AmbientDegC), within(c.AgeRatio)
		b.at(func(int) bool { return r.IntN(2) == 0 })
		for i := range b.answer.Limits {
			if l := &b.answer.Limits[i]; proven[l.Quantity] && !l.FullLoad {
				ok, saw := b.keeps(l)
				assert.True(t, ok, "%d, random vertex: %s", k, saw)
			}
		}
	}
}
