package loop

import (
	"math"
	"math/cmplx"
	"math/rand/v2"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/calc/parts"
	"railproof/calc/statespace"
	"railproof/calc/switched"
)

// between returns a number of the range, equally likely in every octave.
func between(r *rand.Rand, least, greatest float64) float64 {
	return least * math.Pow(greatest/least, r.Float64())
}

// anyPlant draws a stage with a loop from wide ranges; most are badly designed.
func anyPlant(r *rand.Rand) (Plant, bool) {
	vin := between(r, 4, 60)
	vout := vin * (0.08 + 0.8*r.Float64())
	fs := between(r, 5e4, 2e6)
	load := between(r, 0.05, 20)
	n := 1 + r.IntN(4)
	c := switched.Circuit{
		Vin: vin, Period: 1 / fs, Phases: n,
		Leg: switched.Leg{
			L: vout * (1 - vout/vin) / (between(r, 0.1, 3) * load / float64(n) * fs), Winding: between(r, 1e-3, 3e-2), HighSide: between(r, 1e-3, 5e-2),
			Rectifier: switched.Rectifier{Slope: between(r, 1e-3, 3e-2)},
		},
		Banks: 1 + r.IntN(3),
	}
	if r.IntN(2) == 0 {
		c.Current = load
	} else {
		c.Conductance = load / vout
	}
	if r.IntN(2) == 0 {
		c.Leg.Rectifier.Threshold, c.Leg.Rectifier.Blocks = 0.4, true
	}
	for k := range c.Banks {
		c.Bank[k] = switched.Bank{C: between(r, 1, 300) * load / (fs * vout), ESR: between(r, 1e-4, 5e-2)}
	}
	p := Plant{Circuit: c, Feedback: divider(vout)}
	p.Feedback.Lower = p.Feedback.Upper / max(1e-3, vout/0.8-1)
	p.Feedback.Reference = vout / (1 + p.Feedback.Upper/p.Feedback.Lower)
	p.Modulator = parts.Modulator{Present: true, Ramp: between(r, 0.3, 5)}
	if r.IntN(2) == 0 {
		sense := between(r, 0.01, 0.3)
		p.Modulator = parts.Modulator{Present: true, Mode: parts.PeakCurrentMode, Sense: sense, Slope: between(r, 0.1, 3) * sense * vout / c.Leg.L}
	}
	kinds := []parts.CompensatorType{parts.OpAmpType1, parts.OpAmpType2, parts.OpAmpType3, parts.TransconductanceType2, parts.TransconductanceType3}
	p.Compensator = parts.Compensator{
		Present: true, Type: kinds[r.IntN(len(kinds))],
		FeedbackOhm: between(r, 500, 2e5), FeedbackF: between(r, 1e-10, 1e-7), ShuntF: between(r, 1e-12, 1e-9), LeadOhm: between(r, 50, 2e4), LeadF: between(r, 1e-11, 5e-9),
		GainBandwidth: between(r, 1e6, 1e9), OpenLoopGain: between(r, 1e2, 1e6), Transconductance: between(r, 1e-4, 3e-3), OutputOhm: between(r, 1e5, 1e8),
	}
	var solver switched.Solver
	var s switched.Solution
	solver.Regulated(&c, vout, 0, 1, &s)
	p.Operate(&s)
	return p, s.Status.OK() && p.Check() == nil
}

func TestAnyPlantHasAnAnswer(t *testing.T) {
	r := rand.New(rand.NewPCG(20, 26))
	drawn, seen := 0, map[Stability]int{}
	for range 600 {
		p, ok := anyPlant(r)
		if !ok {
			continue
		}
		drawn++
		var s Sampled
		var m Margins
		s.Set(&p)
		s.Margins(&m)
		seen[m.Stability]++
		if !m.Status.OK() {
			require.Contains(t, []Status{NoComparison, SingularPoint, TooStiff}, m.Status)
			require.Equal(t, Undecided, m.Stability)
			continue
		}
		require.False(t, math.IsNaN(m.SpectralRadius))
		require.Positive(t, m.Modulus)

		// 1 + T is the ratio of the characteristic polynomials of closed and open
		// loop: eigenvalues and loop gain, found apart, must agree.
		n := s.joint.N
		var closed, open statespace.ComplexPoint
		require.True(t, s.eigenvalues(&s.closed, n, &closed))
		require.True(t, s.eigenvalues(&s.inner, n, &open))
		for _, share := range []float64{0.02, 0.2, 0.6, 1} {
			z := cmplx.Rect(1, math.Pi*share)
			ratio := complex128(1)
			for i := range n {
				ratio *= (z - closed[i]) / (z - open[i])
			}
			got := 1 + s.Loop(share*p.Nyquist())
			require.Less(t, cmplx.Abs(got-ratio), 1e-6*max(1, cmplx.Abs(ratio)), "%+v", p)
		}
	}
	t.Log(drawn, seen)
	require.Greater(t, drawn, 300)
	require.Greater(t, seen[Stable], 50)
	require.Greater(t, seen[Unstable], 50)
}

// The derivative of the mean output by the duty ratio, over the same wide ranges.
func TestDutyGainOfAnyPlant(t *testing.T) {
	r := rand.New(rand.NewPCG(4, 2))
	checked := 0
	for range 200 {
		p, ok := anyPlant(r)
		var s Sampled
		if !ok || p.Duty > 0.95 || s.Set(&p) > NoComparison {
			continue
		}
		var solver switched.Solver
		h := 2e-4 * p.Duty
		same := true
		mean := func(d float64) float64 {
			var x switched.Solution
			solver.FixedDuty(&p.Circuit, d, &x)
			same = same && x.Status.OK() && x.Leg.Mode == p.Mode
			return x.OutputMean
		}
		want := (8*(mean(p.Duty+h)-mean(p.Duty-h)) - (mean(p.Duty+2*h) - mean(p.Duty-2*h))) / (12 * h)
		if !same {
			continue // the conduction mode changes between the points
		}
		got, ok := s.DutyGain()
		require.True(t, ok)
		require.InEpsilon(t, want, got, 1e-6, "%+v", p)
		checked++
	}
	require.Greater(t, checked, 80)
}
