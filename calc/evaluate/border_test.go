package evaluate_test

import (
	"testing"

	"github.com/stretchr/testify/assert"

	"railproof/calc/evaluate"
	"railproof/calc/quantity"
	"railproof/calc/switched"
)

// Across the border of conduction every load has an answer, and the answers join.
func TestEveryLoadAcrossTheConductionBorderConverges(t *testing.T) {
	for _, rail := range rails {
		s, p := example(t, rail)
		e := evaluate.Prepare(s)
		for _, input := range []float64{18, 24, 26.2267, 32} {
			p.Input, p.AmbientDegC, p.AgeRatio = input, 60, 1
			var r, last evaluate.Result
			p.Load.Current = 1
			e.Eval(&p, &r)
			border := r.Quantities[quantity.BoundaryLoad]
			bad := 0
			const steps = 400
			for i := range steps {
				p.Load.Current = border * (0.98 + 0.04*float64(i)/steps)
				e.Eval(&p, &r)
				if r.Status != evaluate.OK {
					bad++
					continue
				}
				if i > 0 && last.Status == evaluate.OK {
					for _, id := range []quantity.ID{quantity.DutyRatio, quantity.InductorRMS, quantity.LossTotal} {
						assert.InEpsilon(t, last.Quantities[id], r.Quantities[id], 1e-2, "%s at %g A: %s", rail, p.Load.Current, id.Key())
					}
				}
				last = r
			}
			assert.Zero(t, bad, "%s at %g V: of %d loads about %g A", rail, input, steps, border)
		}
	}
}

// However close a load lies to the border, it has an answer: bisection for the load
// at which the mode changes never meets a point without one.
func TestBisectionForTheConductionBorderConverges(t *testing.T) {
	for _, rail := range rails {
		s, p := example(t, rail)
		e := evaluate.Prepare(s)
		for _, input := range []float64{18, 24, 32} {
			for _, degC := range []float64{-20, 60} {
				p.Input, p.AmbientDegC, p.AgeRatio = input, degC, 1
				var r evaluate.Result
				p.Load.Current = 1
				e.Eval(&p, &r)
				border := r.Quantities[quantity.BoundaryLoad]
				low, high := 0.5*border, 2*border
				for range 48 {
					p.Load.Current = (low + high) / 2
					e.Eval(&p, &r)
					assert.Equal(t, evaluate.OK, r.Status, "%s at %g V, %g degC, %.17g A", rail, input, degC, p.Load.Current)
					if r.Mode == switched.Discontinuous {
						low = p.Load.Current
					} else {
						high = p.Load.Current
					}
				}
			}
		}
	}
}
