package transient

import (
	"math"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/calc/loop"
	"railproof/calc/parts"
	"railproof/calc/stage"
	"railproof/calc/switched"
)

func divider() stage.Feedback {
	const upper, reference = 56.2e3, 0.8
	return stage.Feedback{Present: true, Reference: reference, Upper: upper, Lower: upper / (output/reference - 1)}
}

const output = 5.0 // [V] of every stage here

// solved regulates the circuit and returns it with the loop around it.
func solved(t testing.TB, c switched.Circuit, m parts.Modulator, k parts.Compensator) loop.Plant {
	t.Helper()
	var solver switched.Solver
	var s switched.Solution
	solver.Regulated(&c, output, 0, 1, &s)
	require.True(t, s.Status.OK(), "status %d", s.Status)
	p := loop.Plant{Circuit: c, Modulator: m, Compensator: k, Feedback: divider()}
	p.Operate(&s)
	return p
}

// buoy is a 24 V to 5 V, 500 kHz synchronous stage.
func buoy() switched.Circuit {
	return switched.Circuit{
		Vin: 24, Period: 2e-6, Phases: 1,
		Leg:     switched.Leg{L: 6.8e-6, Winding: 8e-3, HighSide: 9e-3, Rectifier: switched.Rectifier{Slope: 7e-3}},
		Banks:   1,
		Bank:    [switched.MaxBanks]switched.Bank{{C: 72e-6, ESR: 0.75e-3}},
		Current: 3,
	}
}

func voltageMode() parts.Modulator {
	return parts.Modulator{Present: true, Ramp: 1.5, CurrentLimit: parts.Unknown}
}

func currentMode() parts.Modulator {
	return parts.Modulator{Present: true, Mode: parts.PeakCurrentMode, Sense: 0.1, Slope: 5e4, CurrentLimit: parts.Unknown}
}

func opAmp() parts.Compensator {
	return parts.Compensator{Present: true, GainBandwidth: math.Inf(1), OpenLoopGain: math.Inf(1)}
}

// designed returns the plant with a compensator for the crossover and margin.
func designed(t testing.TB, p loop.Plant, kind parts.CompensatorType, crossover, margin float64) loop.Plant {
	t.Helper()
	var s loop.Sampled
	d, err := s.Synthesise(&p, loop.Target{Crossover: crossover, PhaseMargin: margin, Type: kind})
	require.NoError(t, err)
	require.Equal(t, loop.Stable, d.Margins.Stability)
	p.Compensator = d.Compensator
	return p
}

func bounds(p *loop.Plant) Bounds {
	return DefaultBounds(&parts.Controller{MaxDutyRatio: 1}, p)
}

func run(t testing.TB, s *Setup) (*Engine, Result) {
	t.Helper()
	e, err := New(s)
	require.NoError(t, err)
	for e.Advance(100) {
	}
	return e, e.Result()
}
