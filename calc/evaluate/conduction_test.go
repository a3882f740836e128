package evaluate_test

import (
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/calc/evaluate"
	"railproof/calc/quantity"
	"railproof/calc/stage"
	"railproof/calc/switched"
)

// Boundary is told within a thousandth of the border on both sides, and only where
// the rectifier blocks.
func TestBoundaryIsToldAtTheBorderOfConduction(t *testing.T) {
	for _, rectifier := range []stage.Rectifier{stage.SynchronousEmulated, stage.Synchronous} {
		s, p := example(t, "buoy-5v0")
		s.Rectifier = rectifier
		e := evaluate.Prepare(s)
		var r evaluate.Result
		at := func(load float64) switched.Mode {
			p.Load.Current = load
			e.Eval(&p, &r)
			require.True(t, r.Status.OK(), "%v", r.Status)
			return r.Conduction()
		}
		at(3)
		border := r.Quantities[quantity.BoundaryLoad]
		for range 20 {
			at(border * 1.0001)
			border = r.Quantities[quantity.BoundaryLoad]
		}
		require.Equal(t, switched.Continuous, at(border*1.01))
		if rectifier == stage.Synchronous {
			require.Equal(t, switched.Continuous, at(border))
			require.Equal(t, switched.Continuous, at(border*0.9))
			continue
		}
		require.Equal(t, switched.Boundary, at(border*1.0005))
		require.Equal(t, switched.Continuous, r.Mode)
		require.Equal(t, switched.Boundary, at(border*0.9995))
		require.Equal(t, switched.Discontinuous, at(border*0.9))
	}
}
