package corners_test

import (
	"fmt"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/calc/corners"
	"railproof/calc/sampling"
)

// Units are drawn from what the typical stage comes to, yet a worst sample has the
// figure that its coordinates alone give, in one run and in one joined from parts.
func TestWorstSamplesHaveTheFiguresOfTheirPoints(t *testing.T) {
	for _, rail := range []string{"buoy-5v0", "buoy-3v3"} {
		t.Run(rail, func(t *testing.T) {
			d := example(t, rail).design(t, corners.DesignOptions{})
			hot := make([]float64, len(d.Problem().Coordinates))
			hot[len(hot)-1] = 1
			prepare := func() *corners.MonteCarlo {
				mc, err := corners.NewMonteCarlo(d.Problem(), d.Spreads(), corners.Plan{
					Sampling: sampling.Design{Seed: 3, Samples: 600}, Corners: [][]float64{make([]float64, len(hot)), hot}, Worst: 4, Workers: 2,
				})
				require.NoError(t, err)
				return mc
			}
			whole := prepare()
			run(whole, d, 2)
			m, out := d.Model(), make([]float64, d.Problem().Quantities)
			for k, target := range d.Problem().Targets {
				require.Len(t, whole.Worst(k), 4)
				for _, w := range whole.Worst(k) {
					m.Eval(whole.Sample(w.Sample, w.Corner), out)
					require.Equal(t, out[target.Quantity], w.Value, fmt.Sprint(target, w))
				}
			}
			var counts [][]byte
			for part := range 3 {
				one := prepare().Part(part, 3)
				run(one, d, 2)
				counts = append(counts, one.Counts())
			}
			joined := prepare()
			job, err := joined.Join(counts)
			require.NoError(t, err)
			run(job, d, 1)
			for k := range d.Problem().Targets {
				require.Equal(t, whole.Worst(k), joined.Worst(k))
			}
		})
	}
}
