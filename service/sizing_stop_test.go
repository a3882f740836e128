package service

import (
	"context"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/calc/parts"
	"railproof/calc/sizing"
	"railproof/calc/stage"
)

func stepRequirement() *SizingRequest {
	r := stage.Requirement{
		Name: "rail", Input: stage.Range{Min: 18, Typ: 24, Max: 32}, Output: 5, OutputTolerance: 0.03,
		LoadCurrent: stage.Range{Min: 0.1, Typ: 3, Max: 6}, AmbientDegC: stage.Range{Min: -20, Typ: 25, Max: 60},
		Rectifier: stage.Synchronous, PhaseCount: 1, SwitchingFrequency: stage.Range{Min: 500e3, Typ: 500e3, Max: 500e3},
	}
	r.Targets = stage.Targets{
		InductorRippleRatio: 0.3, OutputRipple: 0.03, InputRipple: 0.3, Efficiency: 0.9, JunctionDegC: 125, Life: parts.Unknown, ContinuousDownTo: parts.Unknown,
		LoadStep: stage.LoadStep{Step: 3, Slew: 1e6, Deviation: 0.15, Recovery: 1e-4},
		HoldUp:   stage.HoldUp{Time: parts.Unknown, To: parts.Unknown},
	}
	return &SizingRequest{At: "/requirement", Requirement: r, Choices: sizing.NewChoices()}
}

// Whoever leaves between two pieces of a sizing's checks is heard at the next one,
// and the checks of a broken run are not told.
func TestSizingIsLeftBetweenAnyTwoPieces(t *testing.T) {
	r := stepRequirement()
	var left sizing.Answer
	whole := 0
	for range sizing.InPieces(&r.Requirement, r.Choices, 500e3, &left) {
		whole++
	}
	require.Greater(t, whole, 10)
	for stop := 1; stop < whole; stop++ {
		left = sizing.Answer{}
		pieces := 0
		for range sizing.InPieces(&r.Requirement, r.Choices, 500e3, &left) {
			if pieces++; pieces == stop {
				break
			}
		}
		require.Nil(t, left.Stage, "left after %d of %d pieces", stop, whole)
	}
	a := sizing.SizeAt(&r.Requirement, r.Choices, 500e3)
	require.True(t, a.Status.OK(), "%v", a.Conflicts)
	for name, run := range map[string]func(yield func() bool){"corners": a.Verifying, "load step": a.VerifyingStep(&r.Requirement)} {
		a.Checks = nil
		ctx, cancel := context.WithCancel(t.Context())
		pieces := 0
		err := polled(ctx, nil, func(yield func() bool) {
			run(func() bool {
				if pieces++; pieces == 3 {
					cancel()
				}
				return yield()
			})
		})
		require.ErrorIs(t, err, context.Canceled, name)
		require.Equal(t, 3, pieces, "%s: nothing is done after the end", name)
		require.Empty(t, a.Checks, name)
		require.NoError(t, polled(t.Context(), nil, run))
		require.NotEmpty(t, a.Checks, name)
	}
}

func TestSizingStopsWithItsCaller(t *testing.T) {
	ctx, cancel := context.WithCancel(t.Context())
	cancel()
	_, err := New(Options{}).Sizing(ctx, stepRequirement())
	require.ErrorIs(t, err, context.Canceled)
}
