package corners

import (
	"math"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/calc/evaluate"
	"railproof/calc/sampling"
	"railproof/calc/spread"
	"railproof/calc/switched"
)

func TestPartsMergeToTheSameRun(t *testing.T) {
	for _, method := range []sampling.Method{sampling.Independent, sampling.Sobol, sampling.LatinHypercube} {
		set, p := spreads(t, 6, 1, 2, spread.Normal)
		m := staged(func(z, out []float64) (evaluate.Status, switched.Mode) {
			out[0] = math.Sin(z[0]) + z[1]*z[2] + z[6]
			out[1] = math.Round(z[3]*4) + z[6]
			if z[4] > 0.7 {
				return evaluate.DropOut, 1
			}
			return evaluate.OK, 0
		})
		plan := Plan{
			Sampling: sampling.Design{Method: method, Seed: 4, Samples: 20011}, Corners: [][]float64{make([]float64, 7), {6: 1}, {6: -1}},
			Limits: []Limit{{0, -1, 1}, {1, math.NaN(), 2}}, Worst: 5, Workers: 2,
		}
		prepare := func() *MonteCarlo {
			mc, err := NewMonteCarlo(p, set, plan)
			require.NoError(t, err)
			return mc
		}
		whole := prepare()
		runWorkers(whole, m, 2)
		const parts = 5
		counts := make([][]byte, parts)
		for i := range parts {
			part := prepare().Part(i, parts)
			runWorkers(part, m, 2)
			counts[parts-1-i] = part.Counts() // in another order
		}
		joined := prepare()
		join, err := joined.Join(counts)
		require.NoError(t, err)
		runWorkers(join, m, 2)
		require.Equal(t, whole.total.append(nil), joined.total.append(nil), "method %d", method)
		require.Equal(t, whole.Yield(0.95), joined.Yield(0.95))
		require.Equal(t, whole.Failures(), joined.Failures())
		for k := range p.Targets {
			require.Equal(t, whole.Worst(k), joined.Worst(k))
		}

		for _, wrong := range [][]byte{nil, counts[0][:len(counts[0])-1], append([]byte{0}, counts[0]...), append(append([]byte{}, counts[0]...), 0)} {
			_, err := prepare().Join([][]byte{wrong})
			require.ErrorIs(t, err, errCounts)
		}
	}
}
