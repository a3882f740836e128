package evaluate_test

import (
	"testing"

	"github.com/stretchr/testify/assert"

	"railproof/calc/evaluate"
	"railproof/calc/quantity"
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
