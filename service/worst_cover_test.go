package service

import (
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/calc/corners"
	"railproof/calc/evaluate"
	"railproof/calc/numeric"
	"railproof/calc/quantity"
	"railproof/calc/stage"
)

// asked is a requirement with the request for its worst case.
func asked() *worstRequest {
	q := &stage.Requirement{
		Input: stage.Range{Min: 18, Typ: 24, Max: 32}, SourceResistance: 0.05, Output: 5, OutputTolerance: 0.03,
		LoadCurrent: stage.Range{Min: 0.1, Typ: 3, Max: 6}, AmbientDegC: stage.Range{Min: -20, Typ: 25, Max: 60},
	}
	d := plain()
	return &worstRequest{design: d, at: "/conditions", conditions: ConditionsOf(q, d.Stage), requirementAt: "/requirement", requirement: q}
}

func TestConditionsMustCoverTheRequirement(t *testing.T) {
	for name, c := range map[string]struct {
		change func(*worstRequest)
		want   []string
	}{
		"as-asked":      {func(*worstRequest) {}, nil},
		"wider":         {func(r *worstRequest) { r.conditions.Input.Max, r.conditions.AmbientDegC.Min = 40, -40 }, nil},
		"input-short":   {func(r *worstRequest) { r.conditions.Input.Max = 31 }, []string{"/conditions/input_v"}},
		"ambient-short": {func(r *worstRequest) { r.conditions.AmbientDegC.Min = 0 }, []string{"/conditions/ambient_degc"}},
		"load-short":    {func(r *worstRequest) { r.conditions.LoadCurrent.Max = 3 }, []string{"/conditions/load"}},
		"load-by-a-resistance": {func(r *worstRequest) {
			r.conditions.LoadCurrent, r.conditions.LoadConductance = stage.Range{}, stage.Range{Min: 0.02, Typ: 0.6, Max: 1.2}
		}, nil},
		"other-source": {func(r *worstRequest) { r.conditions.SourceResistance = 0 }, []string{"/conditions/source_ohm"}},
		"new-only":     {func(r *worstRequest) { r.conditions.AgeRatio = stage.Range{} }, nil},
		"new-only-and-ages": {func(r *worstRequest) {
			r.conditions.AgeRatio = stage.Range{}
			r.design.Stage.OutputCapacitors[0].CapacitanceAgeing = numeric.Table{X: []float64{0, 1}, Y: []float64{1, 0.8}}
		}, []string{"/conditions/age_ratio"}},
		"hold-up": {func(r *worstRequest) { r.requirement.Targets.HoldUp.Time = 1e-3 }, []string{"/requirement/targets/hold_up"}},
	} {
		t.Run(name, func(t *testing.T) {
			r := asked()
			c.change(r)
			var at []string
			for _, g := range uncovered(r) {
				at = append(at, g.Pointer)
			}
			require.Equal(t, c.want, at)
		})
	}
}

// Where the output is held at a voltage, nothing is known of its accuracy.
func TestAHeldOutputHasNoAccuracy(t *testing.T) {
	r := asked()
	for kind, absent := range map[stage.ControlKind]bool{stage.RegulateTo: true, stage.ByFeedback: false, stage.FixedDuty: false} {
		r.conditions.Control.Kind = kind
		var w worstCase
		w.Absent = map[quantity.ID][]string{}
		w.heldOutput(r)
		require.Equal(t, absent, w.Absent[quantity.LoadVoltage] != nil, kind)
	}
}

// A capacitor's temperature without its thermal resistance rests on what is assumed.
func TestWhatAnAssumedNumberBearsOn(t *testing.T) {
	d := plain()
	d.Stage.OutputCapacitors[0].ESR = 0.3
	e := evaluate.Prepare(d.Stage)
	point := typical()
	var r evaluate.Result
	e.Eval(&point, &r)
	list := underAssumed(e, &point, d.Assumed, func(string) corners.Extension { return nil })
	const field = "output_capacitors/0/thermal/junction_to_ambient_k_per_w"
	id := quantity.OutputCapacitorTemperature
	under := underOf(list, "/stage", id, r.Quantities[id])
	ends, rests := under["/stage/"+field]
	require.True(t, rests, "%v", under)
	require.InDelta(t, point.AmbientDegC, ends[0], 1e-9, "without resistance no rise")
	require.Greater(t, ends[1], r.Quantities[id])
	var again evaluate.Result
	e.Eval(&point, &again)
	for _, q := range []quantity.ID{id, quantity.LossTotal, quantity.OutputRipplePP} {
		require.Equal(t, r.Quantities[q], again.Quantities[q], "the evaluator is left as it was")
	}
}
