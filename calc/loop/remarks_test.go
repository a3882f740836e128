package loop

import (
	"math"
	"testing"

	"github.com/stretchr/testify/require"
)

func remarksOf(t *testing.T, p Plant) map[Topic]Remark {
	t.Helper()
	s := sampledOf(t, p)
	var a Averaged
	var m Margins
	a.Set(&p)
	s.Margins(&m)
	found := map[Topic]Remark{}
	for _, r := range s.Remarks(&a, &m) {
		require.NotEmpty(t, r.Detail)
		require.NotEmpty(t, r.Field)
		found[r.Topic] = r
	}
	return found
}

func TestRemarksPointAtWhatIsWrong(t *testing.T) {
	good := typeThreePlant(t, 40e3, 60)
	require.Empty(t, remarksOf(t, good))

	bad := good // without its lead
	bad.Compensator.LeadF /= 30
	unstable := remarksOf(t, bad)
	require.Contains(t, unstable, LoopUnstable)
	require.Contains(t, unstable, LittlePhase)
	require.Equal(t, "compensator/lead_f", unstable[ZerosTooHigh].Field)

	require.Contains(t, remarksOf(t, scaled(good, 5)), CrossoverTooHigh)

	late := good
	late.Compensator.FeedbackF /= 12
	require.Equal(t, "compensator/feedback_f", remarksOf(t, late)[ZerosTooHigh].Field)

	require.Contains(t, remarksOf(t, conditional(t)), LowerGainUnstable)

	slow := good
	slow.Compensator.GainBandwidth = 150e3
	r := remarksOf(t, slow)
	require.Contains(t, r, AmplifierTooSlow)
	require.Greater(t, r[AmplifierTooSlow].Limit, 150e3)

	dull := good
	dull.Compensator.OpenLoopGain = 50
	require.Contains(t, remarksOf(t, dull), LittleDirectGain)

	low := remarksOf(t, typeThreePlant(t, 12e3, 60))
	require.Contains(t, low, CrossoverTooLow)

	weak := scaled(good, 1e-9)
	require.Contains(t, remarksOf(t, weak), NoCrossover)

	c := buoy()
	c.Vin = 8
	m := currentModulator()
	m.Slope = 0
	alternating := remarksOf(t, solvedPlant(t, c, 5, m, transconductor()))
	require.Contains(t, alternating, CurrentAlternates)
	p := solvedPlant(t, c, 5, m, transconductor())
	p.Modulator.Slope = 1.1 * alternating[CurrentAlternates].Limit
	require.NotContains(t, remarksOf(t, p), CurrentAlternates, "the slope that it asks for is enough")
}

func TestBudgetAddsUpToThePhaseOfTheLoopGain(t *testing.T) {
	p := typeThreePlant(t, 50e3, 55)
	p.Modulator.Delay = 60e-9
	p.Compensator.GainBandwidth = 5e6
	var a Averaged
	a.Set(&p)
	for _, f := range []float64{100, 5e3, 50e3, 120e3} {
		b := a.Budget(f)
		var phase [1]float64
		UnwrappedDeg(phase[:], []complex128{a.Loop(f)})
		require.InDelta(t, 0, math.Remainder(phase[0]-b.Total, 360), 1e-6)
		require.Less(t, b.Amplifier, 0.0)
		require.Less(t, b.Delay, 0.0)
	}
}
