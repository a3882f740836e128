package transient

import (
	"math"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/calc/loop"
	"railproof/calc/parts"
)

// slowLoop is a transconductance compensator far too slow to matter at half the
// switching frequency.
func slowLoop() parts.Compensator {
	return parts.Compensator{
		Present: true, Type: parts.TransconductanceType2, Transconductance: 1e-4, OutputOhm: math.Inf(1),
		FeedbackOhm: 100, FeedbackF: 1e-6, ShuntF: 1e-7,
	}
}

// stageAt returns a nearly lossless 5 V current-mode stage that works at the duty
// ratio, with a slope compensation of the given part of the falling slope.
func stageAt(t *testing.T, duty, compensation float64) loop.Plant {
	c := buoy()
	c.Vin = 5 / duty
	c.Leg.Winding, c.Leg.HighSide, c.Leg.Rectifier.Slope = 1e-6, 1e-6, 1e-6
	c.Bank[0].C = 2e-3
	m := currentMode()
	m.Slope = compensation * m.Sense * 5 / c.Leg.L
	return solved(t, c, m, slowLoop())
}

// alternates reports whether a disturbance of the inductor current grows from
// period to period.
func alternates(t *testing.T, p loop.Plant) bool {
	setup := Setup{
		Plant: p, Bounds: bounds(&p), Duration: 400 * p.Circuit.Period, Saturation: parts.Unknown,
		Events: []Event{{Kind: LoadStep, At: 2.3 * p.Circuit.Period, Change: 1e-3}},
	}
	e, err := New(&setup)
	require.NoError(t, err)
	require.Equal(t, Running, e.status)
	// The second difference sees the alternation and not the slow response.
	var i [3]float64
	second := func() float64 {
		for k := range i {
			e.Advance(1)
			i[k] = e.now.z[0]
		}
		return math.Abs(i[2] - 2*i[1] + i[0])
	}
	e.Advance(20)
	early := second()
	e.Advance(100)
	return second() > early
}

func TestSubharmonicOscillationBeginsAtTheDutyOfTheory(t *testing.T) {
	for _, compensation := range []float64{0, 0.2, 0.4} {
		// -(Sf - Se)/(Sn + Se) = -1 with Sf/Sn = D/(1-D) and Se = k Sf.
		theory := 1 / (2 * (1 - compensation))
		lo, hi := theory-0.05, theory+0.05
		require.False(t, alternates(t, stageAt(t, lo, compensation)))
		require.True(t, alternates(t, stageAt(t, hi, compensation)))
		for hi-lo > 2e-4 {
			mid := (lo + hi) / 2
			if alternates(t, stageAt(t, mid, compensation)) {
				hi = mid
			} else {
				lo = mid
			}
		}
		require.InEpsilon(t, theory, hi, 2e-3, "compensation %g", compensation)

		// The eigenvalues of the sampled-data model turn at the same duty ratio.
		for _, d := range []float64{lo - 1e-3, hi + 1e-3} {
			p := stageAt(t, d, compensation)
			var s loop.Sampled
			var m loop.Margins
			require.True(t, s.Set(&p).OK())
			s.Margins(&m)
			require.Equal(t, d > theory, m.Stability == loop.Unstable, "D %g, radius %.6g", d, m.SpectralRadius)
			require.Equal(t, d > theory, m.Subharmonic)
		}
	}
}
