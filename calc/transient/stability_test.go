package transient

import (
	"math"
	"strconv"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/calc/loop"
	"railproof/calc/parts"
)

// growth runs the loop after a tiny disturbance beside an undisturbed one and
// returns by how much their distance grows per period, from the least-squares slope
// of its logarithm, over the number of periods in which it could be told. The rate
// expected chooses disturbance and waiting time so that it can.
func growth(t *testing.T, p loop.Plant, expected float64) (rate float64, periods int) {
	t.Helper()
	const count = 240
	disturbance, settle := 1e-6, 40
	if expected > 1 {
		disturbance = 1e-10
	}
	settle = min(settle, int(math.Log(1e3)/math.Abs(math.Log(expected))))
	period := p.Circuit.Period
	setup := Setup{Plant: p, Bounds: Bounds{MaxDuty: 1, ControlLow: -1e3, ControlHigh: 1e3}, Duration: float64(settle+count+2) * period, Saturation: parts.Unknown}
	still, err := New(&setup)
	require.NoError(t, err)
	require.Equal(t, Running, still.status)
	moved, err := New(&setup)
	require.NoError(t, err)
	moved.now.z[moved.joint.Bank] += disturbance
	distance := func() float64 {
		sum := 0.0
		for i := range still.joint.Integral {
			d := moved.now.z[i] - still.now.z[i]
			sum += d * d
		}
		return math.Log(sum) / 2
	}
	still.Advance(settle)
	moved.Advance(settle)
	var n, sx, sy, sxx, sxy float64
	for k := 1.0; k <= count; k++ {
		still.Advance(1)
		moved.Advance(1)
		d := distance()
		if d < math.Log(3e-12) || d > math.Log(1e-4) {
			break // rounding, or no longer small
		}
		n, sx, sy, sxx, sxy = n+1, sx+k, sy+d, sxx+k*k, sxy+k*d
	}
	return math.Exp((n*sxy - sx*sy) / (n*sxx - sx*sx)), int(n)
}

func TestEigenvaluesTellGrowthAndDecay(t *testing.T) {
	decided := map[loop.Stability]int{}
	told, ofUnequal := 0, 0
	for name, p := range every(t) {
		for _, gain := range []float64{0.5, 2, 3, 4, 6} {
			t.Run(name+"/"+strconv.FormatFloat(gain, 'g', -1, 64), func(t *testing.T) {
				q := p
				c := &q.Compensator
				c.FeedbackF, c.ShuntF, c.FeedbackOhm = c.FeedbackF/gain, c.ShuntF/gain, c.FeedbackOhm*gain
				var s loop.Sampled
				var m loop.Margins
				if !s.Set(&q).OK() {
					t.Skip("at this gain the comparator meets the ramp more than once: there is no operating point to linearise about")
				}
				s.Margins(&m)
				decided[m.Stability]++
				// Per period, of a map over an N-th of it.
				want := math.Pow(m.SpectralRadius, float64(q.Circuit.Phases))
				got, periods := growth(t, q, want)
				if periods < 12 {
					return // it came or went too fast to be told apart from rounding
				}
				told++
				if strings.HasPrefix(name, "unequal/") {
					ofUnequal++
				}
				if math.Abs(want-1) > 0.003 {
					require.Equal(t, want > 1, got > 1, "model %.6f, run %.6f", want, got)
				}
				tolerance := 0.03
				if periods < 40 {
					tolerance = 0.1 // an oscillation of few periods has no clear envelope
				}
				require.InDelta(t, want, got, tolerance, "%d periods", periods)
			})
		}
	}
	require.Greater(t, told, 25)
	require.Greater(t, ofUnequal, 15)
	require.Greater(t, decided[loop.Stable], 10)
	require.Greater(t, decided[loop.Unstable], 5)
}
