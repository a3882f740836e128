package stage_test

import (
	"errors"
	"testing"

	"github.com/stretchr/testify/assert"
	"github.com/stretchr/testify/require"

	"railproof/calc/parts"
	"railproof/calc/stage"
)

// complete returns a stage in which every number lies within its bounds.
func complete(r stage.Rectifier) *stage.Stage {
	s := stage.NewStage(r, 2, 1, 0, true, true, true, true)
	for _, f := range s.Fields() {
		if !f.Required {
			continue
		}
		*f.Value = f.Least + (f.Greatest-f.Least)/1e3
	}
	s.ApplyDefaults()
	return s
}

func TestEveryFieldRefusesNaNAndValuesOutsideItsBounds(t *testing.T) {
	for _, r := range []stage.Rectifier{stage.Synchronous, stage.DiodeRectified} {
		require.NoError(t, complete(r).Check())
		for i, f := range complete(r).Fields() {
			for _, bad := range []float64{f.Least - 1e-9 - f.Least/2, 2*f.Greatest + 1} {
				s := complete(r)
				at := s.Fields()[i]
				*at.Value = bad
				if at.Default != nil && bad == at.Default.Value {
					continue
				}
				var invalid *stage.InvalidError
				if bad >= f.Least && bad <= f.Greatest {
					continue
				}
				require.True(t, errors.As(s.Check(), &invalid), "%s = %g passes", f.ID, bad)
				assert.Equal(t, f.ID, invalid.Faults[0].Field)
			}
			if f.Required {
				s := complete(r)
				*s.Fields()[i].Value = parts.Unknown
				require.Error(t, s.Check(), "%s missing passes", f.ID)
			}
		}
	}
}

func TestFieldIDsAreUniqueAndReachEveryNumber(t *testing.T) {
	s := complete(stage.Synchronous)
	seen := map[string]bool{}
	for _, f := range s.Fields() {
		assert.False(t, seen[f.ID], f.ID)
		seen[f.ID] = true
		assert.Same(t, f.Value, s.Field(f.ID), f.ID)
	}
	assert.Nil(t, s.Field("inductor/colour"))
}

func TestDefaultsAreReportedOnceAndOnlyForWhatIsMissing(t *testing.T) {
	s := stage.NewStage(stage.Synchronous, 1, 0, 0, false, false, false, false)
	s.Controller.DeadTime = 3e-8
	assumed := s.ApplyDefaults()
	for _, a := range assumed {
		assert.NotEqual(t, "controller/dead_time_s", a.Field)
		assert.Equal(t, a.Value, *s.Field(a.Field), a.Field)
		assert.LessOrEqual(t, a.Low, a.High, a.Field)
		assert.NotEmpty(t, a.Why)
	}
	assert.Empty(t, s.ApplyDefaults())
	assert.False(t, parts.Known(s.HighSide.Rating.DrainSource), "an absent rating stays unknown")
}

func TestCloneSharesNoNumber(t *testing.T) {
	s := complete(stage.Synchronous)
	c := s.Clone()
	for i, f := range c.Fields() {
		before := *s.Fields()[i].Value
		*f.Value = -12345
		now := *s.Fields()[i].Value
		assert.True(t, now == before || !parts.Known(before), f.ID)
	}
}
