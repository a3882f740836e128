package transient

import (
	"math"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/calc/loop"
	"railproof/calc/parts"
	"railproof/calc/switched"
)

// interleaved is a stage of several phases in peak current mode whose comparators
// are slow, with a transconductance amplifier of finite output resistance.
func interleaved(t *testing.T, phases int, input float64) loop.Plant {
	c := buoy()
	c.Vin, c.Phases, c.Current = input, phases, 2*float64(phases)
	m := currentMode()
	m.Delay, m.Slope = 5e-8, 1e5
	k := parts.Compensator{Present: true, Transconductance: 1e-3, OutputOhm: 1e7}
	return designed(t, solved(t, c, m, k), parts.TransconductanceType2, 40e3, 55)
}

// Whatever the duty ratio, the run starts in the periodic solution: also where a
// decision still waits for its delay as the clock of phase 0 comes.
func TestStartIsPeriodicAtAnyDutyRatio(t *testing.T) {
	for phases := 1; phases <= 4; phases++ {
		waiting := false
		for duty := 0.1; duty < 0.9; duty += 0.015 {
			p := interleaved(t, phases, output/duty)
			decided := (p.Duty - p.Modulator.Delay/p.Circuit.Period) * float64(phases)
			waiting = waiting || math.Floor(decided) != math.Floor(p.Duty*float64(phases))
			requirePeriodic(t, &p, "%d phases, duty ratio %g", phases, duty)
		}
		require.Equal(t, phases > 1, waiting, "a decision waits at the clock")
	}
}

// A network that asks for thousands of times the gain of the stage makes the map of
// one period steep: small changes of the output move the comparator far.
func TestStartIsPeriodicAtAHighGain(t *testing.T) {
	c := buoy()
	c.Bank[0] = switched.Bank{C: 40e-3, ESR: 1e-6}
	m := currentMode()
	m.Slope = 1e5
	k := parts.Compensator{Present: true, Transconductance: 1e-3, OutputOhm: 1e7}
	p := designed(t, solved(t, c, m, k), parts.TransconductanceType2, 36e3, 60)
	require.Greater(t, p.Compensator.FeedbackOhm, 1e6)
	requirePeriodic(t, &p, "high gain")
}

func requirePeriodic(t *testing.T, p *loop.Plant, what string, values ...any) {
	t.Helper()
	_, r := run(t, &Setup{Plant: *p, Bounds: bounds(p), Duration: 40 * p.Circuit.Period, Band: 1e-3, Saturation: parts.Unknown})
	require.Equal(t, Finished, r.Status, append([]any{what}, values...)...)
	require.False(t, r.Restless, append([]any{what}, values...)...)
	require.Less(t, r.FinalChange, 1e-7, append([]any{what}, values...)...)
}

// The model finds the instants of unequal phases by itself; the run makes them.
func TestPeriodicSolutionOfUnequalPhasesIsWhatTheRunDoes(t *testing.T) {
	for name, p := range unequal(t) {
		if p.Source.Present {
			continue // the model holds the on-times there, the run the output
		}
		t.Run(name, func(t *testing.T) {
			period := p.Circuit.Period
			e, err := New(&Setup{Plant: p, Bounds: wide, Duration: 400 * period, Saturation: parts.Unknown})
			require.NoError(t, err)
			require.Equal(t, Running, e.status)
			d := e.model.Decision()
			e.advance(300*period + d.At - e.grain())
			for i := range e.joint.Integral {
				require.InDelta(t, d.State[i], e.now.z[i], 1e-6*scaleOf(d.State[i]), "state %d", i)
			}
			require.InDelta(t, e.setup.Plant.Feedback.OutputVoltage(), e.lastMean, 1e-7)
		})
	}
}

// With far too much gain the comparators of unequal phases have no periodic solution;
// the run begins with what they do instead.
func TestUnequalPhasesWithoutAPeriodicSolutionRunAllTheSame(t *testing.T) {
	p := unequal(t)["unequal/voltage/three-phases"]
	const gain = 28.125
	c := &p.Compensator
	c.FeedbackF, c.ShuntF, c.FeedbackOhm = c.FeedbackF/gain, c.ShuntF/gain, c.FeedbackOhm*gain
	var s loop.Sampled
	require.Equal(t, loop.NotConverged, s.Set(&p))
	e, err := New(&Setup{Plant: p, Bounds: wide, Duration: 50 * p.Circuit.Period, Saturation: parts.Unknown})
	require.NoError(t, err)
	require.Equal(t, Running, e.status)
	require.True(t, e.restless)
}
