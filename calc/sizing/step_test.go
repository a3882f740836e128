package sizing_test

import (
	"math"
	"testing"

	"github.com/stretchr/testify/assert"

	"railproof/calc/quantity"
	"railproof/calc/sizing"
)

// Load steps on the drafts, cycle by cycle in closed loop: deviation, recovery and
// peak keep the limits that the capacitors, the inductor and its saturation rating
// were sized for.
func TestLoadStepsOfTheDrafts(t *testing.T) {
	t.Parallel()
	followed, left, worst := 0, 0, 0.0
	drafts(t, requirements, func(k int, a *sizing.Answer) {
		req := generate(k)
		if !(req.Targets.LoadStep.Step > 0) {
			return
		}
		a.VerifyStep(req)
		if len(a.Checks) == 0 {
			left++
			t.Logf("%d: %v", k, a.Notes)
			return
		}
		followed++
		for _, c := range a.Checks {
			assert.True(t, c.Met, "%d: %s is %g, limit %g, at %g V %g A %g degC", k, c.Quantity.Key(), c.Worst, c.Most, c.Corner.Input, c.Corner.Load.Current, c.Corner.AmbientDegC)
			if c.Quantity == quantity.LoadStepDeviation {
				worst = math.Max(worst, c.Worst/c.Most)
			}
		}
	})
	t.Logf("%d load steps followed, %d not; greatest deviation %.2f of its limit", followed, left, worst)
	assert.Zero(t, left)
	assert.Greater(t, worst, 0.5, "the windows waste capacitance")
}
