package loop

import (
	"math"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/calc/parts"
	"railproof/calc/preferred"
)

func ideal() parts.Compensator {
	return parts.Compensator{GainBandwidth: math.Inf(1), OpenLoopGain: math.Inf(1), Transconductance: 1e-3, OutputOhm: math.Inf(1)}
}

func TestSynthesisMeetsItsTargetOnTheExactLoop(t *testing.T) {
	slow := ideal()
	slow.GainBandwidth, slow.OpenLoopGain = 20e6, 1e5
	finite := ideal()
	finite.OutputOhm = 3e6
	late := voltageMode()
	late.Delay = 80e-9
	for name, c := range map[string]struct {
		plant     Plant
		kind      parts.CompensatorType
		crossover float64
		margin    float64
	}{
		"voltage/type-three":            {solvedPlant(t, buoy(), 5, voltageMode(), ideal()), parts.OpAmpType3, 60e3, 52},
		"voltage/type-three/delay":      {solvedPlant(t, buoy(), 5, late, ideal()), parts.OpAmpType3, 60e3, 45},
		"voltage/type-three/slow":       {solvedPlant(t, twoBanks(buoy()), 5, voltageMode(), slow), parts.OpAmpType3, 50e3, 50},
		"voltage/type-two/resting":      {solvedPlant(t, diodeLight(buoy()), 5, voltageMode(), ideal()), parts.OpAmpType2, 15e3, 65},
		"voltage/type-one/resting":      {solvedPlant(t, diodeLight(buoy()), 5, voltageMode(), ideal()), parts.OpAmpType1, 100, 20},
		"voltage/ota-three":             {solvedPlant(t, twoBanks(buoy()), 5, voltageMode(), finite), parts.TransconductanceType3, 40e3, 50},
		"current/ota-two":               {solvedPlant(t, buoy(), 5, currentModulator(), finite), parts.TransconductanceType2, 50e3, 60},
		"current/type-two":              {solvedPlant(t, buoy(), 5, currentModulator(), slow), parts.OpAmpType2, 50e3, 60},
		"current/ota-two/three-phases":  {solvedPlant(t, phases(buoy(), 3), 5, currentModulator(), ideal()), parts.TransconductanceType2, 80e3, 55},
		"voltage/type-three/six-phases": {solvedPlant(t, phases(buoy(), 6), 5, voltageMode(), ideal()), parts.OpAmpType3, 100e3, 55},
	} {
		t.Run(name, func(t *testing.T) {
			var s Sampled
			d, err := s.Synthesise(&c.plant, Target{
				Crossover: c.crossover, PhaseMargin: c.margin, Type: c.kind,
				Rounding: Rounding{Resistors: preferred.E96, Capacitors: preferred.E12},
			})
			require.NoError(t, err)
			m := d.ExactMargins
			require.Equal(t, Stable, m.Stability)
			require.InEpsilon(t, c.crossover, m.Crossover, 1e-4)
			if c.kind == parts.OpAmpType1 {
				require.GreaterOrEqual(t, m.PhaseMargin, c.margin)
			} else {
				at := m.Crossovers[m.CrossoverCount-1]
				require.InDelta(t, c.margin, at.Margin, 0.02)
			}
			k := d.Compensator
			require.True(t, preferred.E12.Contains(k.FeedbackF))
			if c.kind != parts.OpAmpType1 {
				require.True(t, preferred.E96.Contains(k.FeedbackOhm))
				require.True(t, preferred.E12.Contains(k.ShuntF))
			}
			require.Equal(t, Stable, d.Margins.Stability)
			require.InEpsilon(t, c.crossover, d.Margins.Crossover, 0.12, "rounded")
			if c.kind != parts.OpAmpType1 {
				require.InDelta(t, c.margin, d.Margins.PhaseMargin, 12, "rounded")
			}
		})
	}
}

func TestUnreachableTargetsTellTheBound(t *testing.T) {
	voltage := solvedPlant(t, buoy(), 5, voltageMode(), ideal())
	t.Run("phase", func(t *testing.T) {
		for _, kind := range []parts.CompensatorType{parts.OpAmpType2, parts.TransconductanceType2} {
			var s Sampled
			_, err := s.Synthesise(&voltage, Target{Crossover: 50e3, PhaseMargin: 60, Type: kind})
			var unreachable *UnreachableError
			require.ErrorAs(t, err, &unreachable)
			require.Equal(t, "target/phase_margin_deg", unreachable.Field)
			require.Less(t, unreachable.Bound, 60.0)
			// A little less than the bound can be had.
			if unreachable.Bound > 1 {
				_, err = s.Synthesise(&voltage, Target{Crossover: 50e3, PhaseMargin: 0.9 * unreachable.Bound, Type: kind})
				require.NoError(t, err)
			}
		}
	})
	t.Run("phase/divider-bounds-the-lead", func(t *testing.T) {
		// A 0.9 V output of a 0.8 V reference leaves a lead network hardly any room.
		low := solvedPlant(t, buoy(), 0.9, voltageMode(), ideal())
		var s Sampled
		_, err := s.Synthesise(&low, Target{Crossover: 40e3, PhaseMargin: 60, Type: parts.TransconductanceType3})
		var unreachable *UnreachableError
		require.ErrorAs(t, err, &unreachable)
		require.Less(t, unreachable.Bound, 60.0)
	})
	t.Run("crossover", func(t *testing.T) {
		for _, f := range []float64{250e3, 400e3, 0, -1, math.NaN()} {
			var s Sampled
			_, err := s.Synthesise(&voltage, Target{Crossover: f, PhaseMargin: 60, Type: parts.OpAmpType3})
			require.Contains(t, faultsOf(t, err), "target/crossover_hz")
		}
		var s Sampled
		_, err := s.Synthesise(&voltage, Target{Crossover: 1e3, PhaseMargin: 200, Type: parts.OpAmpType3})
		require.Contains(t, faultsOf(t, err), "target/phase_margin_deg")
	})
	t.Run("amplifier", func(t *testing.T) {
		slow := voltage
		slow.Compensator.GainBandwidth = 2e3
		var s Sampled
		_, err := s.Synthesise(&slow, Target{Crossover: 50e3, PhaseMargin: 50, Type: parts.OpAmpType3})
		var unreachable *UnreachableError
		require.ErrorAs(t, err, &unreachable)
	})
	t.Run("negative-gain", func(t *testing.T) {
		wrong := voltage
		wrong.Compensator.Transconductance = -1e-3
		var s Sampled
		_, err := s.Synthesise(&wrong, Target{Crossover: 20e3, PhaseMargin: 50, Type: parts.TransconductanceType2})
		require.Contains(t, faultsOf(t, err), "compensator/transconductance_s")
	})
}
