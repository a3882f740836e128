package loop

import (
	"math"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/calc/parts"
	"railproof/calc/stage"
	"railproof/calc/switched"
)

// solvedPlant regulates the circuit to vout and returns it with the loop around it.
func solvedPlant(t testing.TB, c switched.Circuit, vout float64, m parts.Modulator, k parts.Compensator) Plant {
	t.Helper()
	var solver switched.Solver
	var s switched.Solution
	solver.Regulated(&c, vout, 0, 1, &s)
	require.True(t, s.Status.OK(), "status %d", s.Status)
	p := Plant{Circuit: c, Modulator: m, Compensator: k, Feedback: divider(vout)}
	p.Operate(&s)
	return p
}

// divider returns a 0.8 V reference with a 56.2 kohm upper resistor.
func divider(vout float64) stage.Feedback {
	const upper, reference = 56.2e3, 0.8
	return stage.Feedback{Present: true, Reference: reference, Upper: upper, Lower: upper / (vout/reference - 1)}
}

// buoy is a 24 V to 5 V, 500 kHz synchronous stage.
func buoy() switched.Circuit {
	return switched.Circuit{
		Vin: 24, Period: 2e-6, Phases: 1,
		Leg:     switched.Leg{L: 6.8e-6, Winding: 8e-3, HighSide: 9e-3, Rectifier: switched.Rectifier{Slope: 7e-3}},
		Banks:   1,
		Bank:    [switched.MaxBanks]switched.Bank{{C: 72e-6, ESR: 0.75e-3}},
		Current: 6,
	}
}

func twoBanks(c switched.Circuit) switched.Circuit {
	c.Banks = 2
	c.Bank[1] = switched.Bank{C: 330e-6, ESR: 18e-3}
	return c
}

func diodeLight(c switched.Circuit) switched.Circuit {
	c.Leg.Rectifier = switched.Rectifier{Threshold: 0.42, Slope: 20e-3, Blocks: true}
	c.Current, c.Conductance = 0.1, 0.02
	return c
}

func phases(c switched.Circuit, n int) switched.Circuit {
	c.Phases = n
	return c
}

func voltageMode() parts.Modulator {
	return parts.Modulator{Present: true, Ramp: 1.5}
}

func currentModulator() parts.Modulator {
	return parts.Modulator{Present: true, Mode: parts.PeakCurrentMode, Sense: 0.1, Slope: 5e4}
}

func typeThree() parts.Compensator {
	return parts.Compensator{
		Present: true, Type: parts.OpAmpType3,
		FeedbackOhm: 12e3, FeedbackF: 3.3e-9, ShuntF: 47e-12, LeadOhm: 1e3, LeadF: 330e-12,
		GainBandwidth: math.Inf(1), OpenLoopGain: math.Inf(1),
	}
}

func transconductor() parts.Compensator {
	return parts.Compensator{
		Present: true, Type: parts.TransconductanceType2, Transconductance: 1e-3, OutputOhm: math.Inf(1),
		FeedbackOhm: 10e3, FeedbackF: 3.3e-9, ShuntF: 33e-12,
	}
}
