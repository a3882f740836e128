package sizing_test

import (
	"fmt"
	"testing"

	"github.com/stretchr/testify/assert"

	"railproof/calc/evaluate"
	"railproof/calc/quantity"
	"railproof/calc/sizing"
)

// stressOf returns the quantity that a rating's stress is, and by what it is divided.
func stressOf(a *sizing.Answer, r *sizing.Rating) (id quantity.ID, pieces float64, ok bool) {
	switch r.Part + " " + r.Name {
	case "high_side rms_a":
		return quantity.HighSideRMS, 1, true
	case "high_side mean_a":
		return quantity.HighSideMean, 1, true
	case "low_side rms_a", "diode rms_a":
		return quantity.RectifierRMS, 1, true
	case "low_side mean_a", "diode mean_a":
		return quantity.RectifierMean, 1, true
	case "high_side peak_a", "low_side peak_a", "diode peak_a", "inductor peak_a":
		return quantity.InductorPeak, 1, true
	case "inductor rms_a":
		return quantity.InductorRMS, 1, true
	case "inductor mean_a":
		return quantity.InductorMean, 1, true
	case "input_capacitors/0 rms_a":
		return quantity.InputCapacitorRMS, a.Stage.InputCapacitors[0].Pieces(), true
	case "output_capacitors/0 rms_a":
		return quantity.OutputCapacitorRMS, a.Stage.OutputCapacitors[0].Pieces(), true
	}
	return 0, 0, false
}

// No evaluation inside the box of spreads and conditions stresses a part more than
// its rating says, and the worst comes close to it.
func TestRatingsCoverTheEngine(t *testing.T) {
	t.Parallel()
	// What the closed forms leave out, measured by TestClosedFormsAgainstTheEngine.
	const margin = sizing.ModelMargin
	drafts(t, 50, func(k int, a *sizing.Answer) {
		b := newBox(a)
		worst := make([]float64, len(a.Ratings))
		see := func() {
			if b.result.Status != evaluate.OK {
				return
			}
			for i := range a.Ratings {
				if id, pieces, ok := stressOf(a, &a.Ratings[i]); ok {
					worst[i] = max(worst[i], b.result.Quantities[id]/pieces)
				}
			}
		}
		b.corners(func() {}, func() {
			for _, largeL := range []bool{false, true} {
				for _, highOutput := range []bool{false, true} {
					for _, lossy := range []bool{false, true} {
						b.at(func(i int) bool {
							switch a.Spreads[i].Field {
							case "inductor/inductance_h", "switching_frequency_hz":
								return largeL
							case "feedback/reference_v", "feedback/upper_ohm":
								return highOutput
							case "feedback/lower_ohm":
								return !highOutput
							}
							return lossy
						})
						see()
					}
				}
			}
		})
		for i := range a.Ratings {
			r := &a.Ratings[i]
			if _, _, ok := stressOf(a, r); !ok {
				continue
			}
			what := fmt.Sprintf("%d %s %s", k, r.Part, r.Name)
			assert.LessOrEqual(t, worst[i], r.Applied*margin, what)
			if len(a.Stage.OutputCapacitors) == 1 || r.Part != "output_capacitors/0" {
				assert.GreaterOrEqual(t, worst[i], r.Applied*0.9, what+": far above what the stage does")
			}
		}
	})
}
