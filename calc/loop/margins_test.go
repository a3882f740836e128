package loop

import (
	"math"
	"math/cmplx"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/calc/parts"
	"railproof/calc/stage"
	"railproof/calc/statespace"
)

func faultsOf(t *testing.T, err error) []string {
	t.Helper()
	var invalid *stage.InvalidError
	require.ErrorAs(t, err, &invalid)
	fields := make([]string, 0, len(invalid.Faults))
	for _, f := range invalid.Faults {
		fields = append(fields, f.Field)
	}
	return fields
}

func marginsOf(t testing.TB, p Plant) Margins {
	t.Helper()
	var m Margins
	sampledOf(t, p).Margins(&m)
	require.Equal(t, Analysed, m.Status)
	return m
}

// scaled multiplies the compensator's gain.
func scaled(p Plant, k float64) Plant {
	c := &p.Compensator
	c.FeedbackF, c.ShuntF, c.FeedbackOhm = c.FeedbackF/k, c.ShuntF/k, c.FeedbackOhm*k
	return p
}

func typeThreePlant(t testing.TB, crossover, margin float64) Plant {
	p := solvedPlant(t, buoy(), 5, voltageMode(), typeThree())
	var s Sampled
	d, err := s.Synthesise(&p, Target{Crossover: crossover, PhaseMargin: margin, Type: parts.OpAmpType3})
	require.NoError(t, err)
	p.Compensator = d.Compensator
	return p
}

// The margins are where the eigenvalues turn: with the control voltage's share in
// the comparator's decision multiplied by a gain just below the gain margin the
// closed map is stable, just above it is not.
func TestGainMarginIsWhereTheEigenvaluesTurn(t *testing.T) {
	three := typeThreePlant(t, 40e3, 60).Compensator
	for name, p := range map[string]Plant{
		"voltage":     typeThreePlant(t, 50e3, 55),
		"current":     solvedPlant(t, buoy(), 5, currentModulator(), transconductor()),
		"phases":      solvedPlant(t, phases(buoy(), 3), 5, voltageMode(), three),
		"resting":     solvedPlant(t, diodeLight(buoy()), 5, voltageMode(), three),
		"conditional": conditional(t),
	} {
		t.Run(name, func(t *testing.T) {
			s := sampledOf(t, p)
			var m Margins
			s.Margins(&m)
			require.Equal(t, Stable, m.Stability)
			require.False(t, math.IsNaN(m.GainMargin))
			raised := func(gain float64) float64 {
				n := s.joint.N
				closed := statespace.Real{N: n}
				for i := range n {
					for k := range n {
						closed.Set(i, k, s.inner.At(i, k)+gain*s.decisions[0].enter[i]/s.Slope*s.control[k])
					}
				}
				var e statespace.ComplexPoint
				require.True(t, s.eigenvalues(&closed, n, &e))
				return cmplx.Abs(largest(&e, n))
			}
			require.InEpsilon(t, m.SpectralRadius, raised(1), 1e-9)
			k := math.Pow(10, m.GainMargin/20)
			require.Less(t, raised(k*(1-1e-6)), 1.0)
			require.Greater(t, raised(k*(1+1e-6)), 1.0)
			if m.Conditional {
				k := math.Pow(10, -m.GainReduction/20)
				require.Less(t, raised(k*(1+1e-6)), 1.0)
				require.Greater(t, raised(k*(1-1e-6)), 1.0)
			}
		})
	}
}

func TestNamedStates(t *testing.T) {
	p := typeThreePlant(t, 50e3, 55)
	t.Run("no-crossover", func(t *testing.T) {
		weak := p
		weak.Compensator.OpenLoopGain = 10
		weak.Compensator.Type = parts.OpAmpType1
		weak.Compensator.FeedbackF = 1e-3
		m := marginsOf(t, weak)
		require.Equal(t, AlwaysBelow, m.Crossed)
		require.True(t, math.IsNaN(m.Crossover))
		require.True(t, math.IsNaN(m.PhaseMargin))
		require.Equal(t, Stable, m.Stability)
	})
	t.Run("unstable", func(t *testing.T) {
		m := marginsOf(t, scaled(p, 6))
		require.Equal(t, Unstable, m.Stability)
		require.Greater(t, m.SpectralRadius, 1.0)
		require.Positive(t, m.DominantAt)
	})
	t.Run("comparator-without-clean-crossing", func(t *testing.T) {
		// A fast integrator rises steeply while the output is below its mean, as it
		// is at the end of a short on-time.
		q := p
		q.Compensator.Type, q.Compensator.FeedbackF = parts.OpAmpType1, 1e-14
		var s Sampled
		require.Equal(t, NoComparison, s.Set(&q))
		var m Margins
		s.Margins(&m)
		require.Equal(t, NoComparison, m.Status)
		require.Equal(t, Undecided, m.Stability)
	})
	t.Run("subharmonic", func(t *testing.T) {
		c := buoy()
		c.Vin = 8
		fast := currentModulator()
		fast.Slope = 0
		m := marginsOf(t, solvedPlant(t, c, 5, fast, transconductor()))
		require.True(t, m.Subharmonic)
		require.Equal(t, Unstable, m.Stability)
		require.InEpsilon(t, 250e3, m.DominantAt, 1e-6, "it alternates at half the switching frequency")
	})
	t.Run("conditionally-stable", func(t *testing.T) {
		m := marginsOf(t, conditional(t))
		require.Equal(t, Stable, m.Stability)
		require.True(t, m.Conditional)
		require.Positive(t, m.GainReduction)
		require.Positive(t, m.GainMargin)
	})
}

// conditional has its compensator's zeros far above the output filter's
// resonance, so that the phase is below -180° while the gain is high.
func conditional(t *testing.T) Plant {
	p := typeThreePlant(t, 60e3, 50)
	c := &p.Compensator
	c.FeedbackF /= 6
	return p
}

func TestSearchFindsANarrowResonance(t *testing.T) {
	// A lossless filter with a loop gain that crosses 1 only at its resonance.
	c := buoy()
	c.Leg.Winding, c.Leg.HighSide, c.Leg.Rectifier.Slope = 1e-5, 1e-5, 1e-5
	c.Bank[0].ESR = 1e-5
	p := solvedPlant(t, c, 5, voltageMode(), parts.Compensator{
		Present: true, Type: parts.OpAmpType1, FeedbackF: 1e-6, GainBandwidth: math.Inf(1), OpenLoopGain: math.Inf(1),
	})
	m := marginsOf(t, p)
	require.GreaterOrEqual(t, m.CrossoverCount, 3, "down, up and down again within a part of a per mille")
	resonance := 1 / (2 * math.Pi * math.Sqrt(c.Leg.L*c.Bank[0].C))
	require.InEpsilon(t, resonance, m.Crossover, 0.05)
	require.Greater(t, m.Crossover, resonance)
}

func TestTwoEqualBanksAreOneOfTwiceTheCapacitance(t *testing.T) {
	one := typeThreePlant(t, 50e3, 55)
	two := one
	two.Circuit.Banks = 2
	half := one.Circuit.Bank[0]
	half.C, half.ESR = half.C/2, half.ESR*2
	two.Circuit.Bank[0], two.Circuit.Bank[1] = half, half
	a, b := marginsOf(t, one), marginsOf(t, two)
	require.InEpsilon(t, a.Crossover, b.Crossover, 1e-8)
	require.InEpsilon(t, a.PhaseMargin, b.PhaseMargin, 1e-8)
	require.InEpsilon(t, a.Modulus, b.Modulus, 1e-8)
}

// Dimensions: impedances times k and load divided by k leave every gain alone;
// frequency times k with L, C and times divided by k moves the crossover by k.
func TestScaling(t *testing.T) {
	p := typeThreePlant(t, 50e3, 55)
	p.Modulator.Delay = 50e-9
	a := marginsOf(t, p)
	const k = 3.7
	z := p
	z.Circuit.Leg.L *= k
	z.Circuit.Leg.Winding *= k
	z.Circuit.Leg.HighSide *= k
	z.Circuit.Leg.Rectifier.Slope *= k
	z.Circuit.Bank[0].C /= k
	z.Circuit.Bank[0].ESR *= k
	z.Circuit.Current /= k
	b := marginsOf(t, z)
	require.InEpsilon(t, a.Crossover, b.Crossover, 1e-9)
	require.InEpsilon(t, a.PhaseMargin, b.PhaseMargin, 1e-9)
	f := p
	f.Circuit.Period /= k
	f.Circuit.Leg.L /= k
	f.Circuit.Bank[0].C /= k
	f.Modulator.Delay /= k
	c := &f.Compensator
	c.FeedbackF, c.ShuntF, c.LeadF = c.FeedbackF/k, c.ShuntF/k, c.LeadF/k
	b = marginsOf(t, f)
	require.InEpsilon(t, k*a.Crossover, b.Crossover, 1e-9)
	require.InEpsilon(t, a.PhaseMargin, b.PhaseMargin, 1e-9)
}

func TestFeedForwardKeepsTheLoopOverTheInput(t *testing.T) {
	at := func(vin float64, feedForward bool) Margins {
		c := buoy()
		c.Vin = vin
		m := voltageMode()
		m.FeedForward, m.FeedForwardAt = feedForward, 24
		return marginsOf(t, solvedPlant(t, c, 5, m, typeThreePlant(t, 30e3, 60).Compensator))
	}
	require.Greater(t, at(32, false).Crossover/at(16, false).Crossover, 1.2)
	require.InDelta(t, 1, at(32, true).Crossover/at(16, true).Crossover, 0.06)
}

func TestFaultsNameTheirFields(t *testing.T) {
	good := typeThreePlant(t, 50e3, 55)
	for field, change := range map[string]func(p *Plant){
		"modulator":                        func(p *Plant) { p.Modulator.Present = false },
		"modulator/ramp_v":                 func(p *Plant) { p.Modulator.Ramp = 0 },
		"modulator/feed_forward_at_v":      func(p *Plant) { p.Modulator.FeedForward = true },
		"modulator/delay_s":                func(p *Plant) { p.Modulator.Delay = 1e-6 },
		"modulator/sense_ohm":              func(p *Plant) { p.Modulator.Mode = parts.PeakCurrentMode },
		"compensator":                      func(p *Plant) { p.Compensator.Present = false },
		"compensator/feedback_f":           func(p *Plant) { p.Compensator.FeedbackF = 0 },
		"compensator/lead_ohm":             func(p *Plant) { p.Compensator.LeadOhm = 0 },
		"compensator/lead_f":               func(p *Plant) { p.Compensator.LeadF = math.NaN() },
		"compensator/open_loop_gain_ratio": func(p *Plant) { p.Compensator.OpenLoopGain = -1 },
		"compensator/transconductance_s": func(p *Plant) {
			p.Compensator.Type, p.Compensator.Transconductance = parts.TransconductanceType2, -1e-3
		},
		"feedback":              func(p *Plant) { p.Feedback.Present = false },
		"feedback/upper_ohm":    func(p *Plant) { p.Feedback.Upper = 0 },
		"source/capacitors":     func(p *Plant) { p.Source = Source{Present: true, Inductance: 1e-6} },
		"source/resistance_ohm": func(p *Plant) { p.Source = Source{Present: true} },
	} {
		t.Run(field, func(t *testing.T) {
			p := good
			change(&p)
			require.Contains(t, faultsOf(t, p.Check()), field)
		})
	}
	require.NoError(t, good.Check())
}
