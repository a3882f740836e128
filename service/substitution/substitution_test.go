package substitution

import (
	"math"
	"testing"

	"railproof/calc/caution"
	"railproof/calc/quantity"
	"railproof/calc/rules"
	"railproof/calc/stage"

	"github.com/stretchr/testify/require"
)

func finding(rule string, v rules.Verdict, margin float64) rules.Finding {
	return rules.Finding{Rule: rule, Pointer: "/stage/inductor/rating/saturation_a", Severity: rules.Error, Verdict: v, Margin: margin, Value: 1, Limit: 1, Unit: "A", Detail: rule}
}

// assessed returns an assessment with the findings, its overall verdict as
// calc/rules would give it.
func assessed(findings ...rules.Finding) *Assessment {
	a := &Assessment{Extremes: map[quantity.ID]rules.Extreme{}}
	for i := range a.Nominal {
		a.Nominal[i] = math.NaN()
	}
	a.Nominal[quantity.LossTotal] = 2
	a.Report = rules.Report{Verdict: rules.Passed, Findings: findings}
	for _, f := range findings {
		if f.Severity == rules.Note {
			continue
		}
		switch f.Verdict {
		case rules.Fail:
			a.Report.Verdict = rules.Failed
		case rules.NotEvaluated:
			if a.Report.Verdict == rules.Passed {
				a.Report.Verdict = rules.Incomplete
			}
		}
	}
	return a
}

func candidate(after *Assessment) *Candidate {
	return &Candidate{ID: "one", Role: "/stage/inductor", After: after, Cost: math.NaN(), Area: math.NaN()}
}

func TestVerdicts(t *testing.T) {
	elsewhere := finding("waived-elsewhere", rules.Waived, 0.1)
	elsewhere.Pointer = "/stage/inductor_shield"
	note := finding("note", rules.Fail, -0.1)
	note.Severity = rules.Note
	warning := finding("warning", rules.NotEvaluated, math.NaN())
	warning.Severity = rules.Warning
	warningPassed := warning
	warningPassed.Verdict = rules.Pass
	danger := assessed(finding("a", rules.Pass, 0.1))
	danger.Cautions = []caution.Caution{{Code: caution.BeyondAbsoluteMaximum, Pointer: "/stage/high_side/rating/drain_source_v", Value: 50, Detail: "voltage"}}
	assumed := assessed(finding("a", rules.Pass, 0.1))
	assumed.Assumed = []string{"/stage/inductor/dc_resistance_ohm", "/stage/board/input_path_ohm"}
	worse, cured := elsewhere, elsewhere
	worse.Margin, cured.Verdict = 0.05, rules.Pass
	kept, ofKind := finding("kept", rules.Pass, 0.1), finding("for-one-kind", rules.Pass, 0.1)
	ofKind.ByKind = true
	bare := warning
	bare.Rule = rules.RuleCoverage
	narrow := finding("a", rules.Pass, 0.05)
	narrow.WorstBy = rules.VerticesSeeded
	searched := narrow
	searched.WorstBy = rules.Vertices
	cases := []struct {
		name          string
		before, after *Assessment
		want          Verdict
		reason        string
	}{
		{"accepted/same", assessed(finding("a", rules.Pass, 0.1)), assessed(finding("a", rules.Pass, 0.1)), Accepted, ""},
		{"accepted/less-margin", assessed(finding("a", rules.Pass, 0.3)), assessed(finding("a", rules.Pass, 0.01)), Accepted, ""},
		{"accepted/failure-cured", assessed(finding("a", rules.Fail, -0.3)), assessed(finding("a", rules.Pass, 0.01)), Accepted, ""},
		{"accepted/gap-closed", assessed(finding("a", rules.NotEvaluated, math.NaN())), assessed(finding("a", rules.Pass, 0.01)), Accepted, ""},
		{"accepted/note-fails", assessed(finding("a", rules.Pass, 0.3)), assessed(finding("a", rules.Pass, 0.3), note), Accepted, ""},
		{"accepted/waiver-of-another-part", assessed(finding("a", rules.Pass, 1), elsewhere), assessed(finding("a", rules.Pass, 1), elsewhere), Accepted, ""},
		{"rejected/new-failure", assessed(finding("a", rules.Pass, 0.1)), assessed(finding("a", rules.Fail, -0.1)), Rejected, ReasonFails},
		{"rejected/failure-of-a-new-finding", assessed(finding("a", rules.Pass, 0.1)), assessed(finding("a", rules.Pass, 0.1), finding("b", rules.Fail, -0.1)), Rejected, ReasonFails},
		{"rejected/failure-of-what-was-not-evaluated", assessed(finding("a", rules.NotEvaluated, math.NaN())), assessed(finding("a", rules.Fail, -0.1)), Rejected, ReasonFails},
		{"rejected/failure-grows", assessed(finding("a", rules.Fail, -0.1)), assessed(finding("a", rules.Fail, -0.2)), Rejected, ReasonWorse},
		{"rejected/beyond-a-maximum", assessed(finding("a", rules.Pass, 0.1)), danger, Rejected, ReasonDanger},
		{"review/failure-stays", assessed(finding("a", rules.Fail, -0.1)), assessed(finding("a", rules.Fail, -0.1)), NeedsReview, ReasonStillFails},
		{"review/failure-shrinks", assessed(finding("a", rules.Fail, -0.1)), assessed(finding("a", rules.Fail, -0.05)), NeedsReview, ReasonStillFails},
		{"review/data-lost", assessed(finding("a", rules.Pass, 0.1)), assessed(finding("a", rules.NotEvaluated, math.NaN())), NeedsReview, ReasonUnevaluated},
		{"review/never-evaluated", assessed(finding("a", rules.NotEvaluated, math.NaN())), assessed(finding("a", rules.NotEvaluated, math.NaN())), NeedsReview, ReasonUnevaluated},
		{"review/warning-data-lost", assessed(finding("a", rules.Pass, 1), warningPassed), assessed(finding("a", rules.Pass, 1), warning), NeedsReview, ReasonUnevaluated},
		{"review/stand-in-value", assessed(finding("a", rules.Pass, 0.1)), assumed, NeedsReview, ReasonMissing},
		{"review/waived-elsewhere-and-worse", assessed(finding("a", rules.Pass, 1), elsewhere), assessed(finding("a", rules.Pass, 1), worse), NeedsReview, ReasonWaiver},
		{"review/new-failure-under-a-waiver", assessed(finding("a", rules.Pass, 1), cured), assessed(finding("a", rules.Pass, 1), elsewhere), NeedsReview, ReasonWaiver},
		{"review/no-rule-judges-it-any-more", assessed(finding("a", rules.Pass, 1), kept), assessed(finding("a", rules.Pass, 1)), NeedsReview, ReasonUnevaluated},
		{"accepted/a-rule-for-another-kind", assessed(finding("a", rules.Pass, 1), ofKind), assessed(finding("a", rules.Pass, 1)), Accepted, ""},
		{"review/a-pack-without-rules-for-its-kind", assessed(finding("a", rules.Pass, 1), ofKind), assessed(finding("a", rules.Pass, 1), bare), NeedsReview, ReasonUnevaluated},
		{"review/narrow-pass-of-a-shortened-search", assessed(finding("a", rules.Pass, 0.2)), assessed(narrow), NeedsReview, ReasonUnevaluated},
		{"accepted/narrow-pass-of-a-whole-search", assessed(finding("a", rules.Pass, 0.2)), assessed(searched), Accepted, ""},
		{"review/waiver", assessed(finding("a", rules.Waived, -0.1)), assessed(finding("a", rules.Waived, -0.1)), NeedsReview, ReasonWaiver},
	}
	for _, c := range cases {
		t.Run(c.name, func(t *testing.T) {
			o := Judge(c.before, candidate(c.after), nil)
			require.Equal(t, c.want, o.Verdict, "reasons: %+v", o.Reasons)
			if c.reason == "" {
				require.Empty(t, o.Reasons)
				return
			}
			codes := []string{}
			for _, r := range o.Reasons {
				codes = append(codes, r.Code)
				require.NotEmpty(t, r.Detail)
			}
			require.Contains(t, codes, c.reason)
		})
	}
}

func TestRejectionWinsOverReview(t *testing.T) {
	before := assessed(finding("a", rules.Pass, 0.1), finding("b", rules.Pass, 0.1))
	o := Judge(before, candidate(assessed(finding("a", rules.NotEvaluated, math.NaN()), finding("b", rules.Fail, -1))), nil)
	require.Equal(t, Rejected, o.Verdict)
	require.Len(t, o.Reasons, 2, "both are told")
}

func TestAnIncompleteCheckIsNeverAccepted(t *testing.T) {
	after := assessed()
	after.Report.Verdict = rules.Incomplete
	o := Judge(assessed(), candidate(after), nil)
	require.Equal(t, NeedsReview, o.Verdict)
	require.Equal(t, ReasonIncomplete, o.Reasons[0].Code)
}

func TestWithoutDataNothingIsAssessed(t *testing.T) {
	c := candidate(nil)
	c.Missing = []string{"/stage/inductor/inductance_h"}
	o := Judge(assessed(), c, nil)
	require.Equal(t, NeedsReview, o.Verdict)
	require.Equal(t, c.Missing, o.Missing)
	require.Equal(t, ReasonMissing, o.Reasons[0].Code)
	c = candidate(nil)
	c.Failure = "no convergence"
	require.Equal(t, ReasonFailure, Judge(assessed(), c, nil).Reasons[0].Code)
}

func TestAssumptionsOfTheOldPartDoNotCount(t *testing.T) {
	before, after := assessed(finding("a", rules.Pass, 1)), assessed(finding("a", rules.Pass, 1))
	before.Assumed = []string{"/stage/inductor/dc_resistance_ohm"}
	after.Assumed = before.Assumed
	require.Equal(t, Accepted, Judge(before, candidate(after), nil).Verdict)
}

func TestMovesShowTypicalWorstAndLimit(t *testing.T) {
	before, after := assessed(), assessed()
	set := func(a *Assessment, id quantity.ID, nominal, least, most float64) {
		a.Nominal[id] = nominal
		a.Extremes[id] = rules.Extreme{Least: rules.Worst{Value: least}, Greatest: rules.Worst{Value: most}}
	}
	set(before, quantity.InductorPeak, 6, 5, 7)
	set(after, quantity.InductorPeak, 6, 5, 7.5) // moves at worst only
	set(before, quantity.OutputRippleWithESLPP, 0.01, 0.005, 0.02)
	set(after, quantity.OutputRippleWithESLPP, 0.012, 0.005, 0.02)
	set(before, quantity.InductorRMS, 5, 4, 6)
	set(after, quantity.InductorRMS, 5*(1+1e-9), 4, 6)
	limits := LimitsOf(&stage.Requirement{Output: 5, OutputTolerance: 0.02, Targets: stage.Targets{OutputRipple: 0.03, InputRipple: math.NaN()}})
	list := Judge(before, candidate(after), limits).Moves
	require.Len(t, list, 2)
	require.Equal(t, quantity.OutputRippleWithESLPP, list[0].Quantity)
	require.Equal(t, 0.03, list[0].Max)
	require.True(t, math.IsNaN(list[0].Min))
	b, a := list[1].Worst()
	require.Equal(t, []float64{7, 7.5}, []float64{b, a})
	list[1].Min = 1
	b, a = list[1].Worst()
	require.Equal(t, []float64{5, 5}, []float64{b, a}, "a lower limit looks at the least")
	require.Equal(t, quantity.InductorPeak, list[1].Quantity)
	require.Equal(t, []float64{7, 7.5}, []float64{list[1].GreatestBefore, list[1].GreatestAfter})
}

func TestChangedFindings(t *testing.T) {
	before := assessed(finding("same", rules.Pass, 0.1), finding("gone", rules.Pass, 0.1), finding("moved", rules.Pass, 0.1), finding("turned", rules.Pass, 0.1))
	after := assessed(finding("same", rules.Pass, 0.1), finding("moved", rules.Pass, 0.05), finding("turned", rules.Fail, -0.1), finding("new", rules.Pass, 0.1))
	got := map[string]string{}
	for _, c := range Judge(before, candidate(after), nil).Changes {
		f := c.After
		if f == nil {
			f = c.Before
		}
		got[f.Rule] = c.Kind.String()
	}
	require.Equal(t, map[string]string{"gone": "disappears", "moved": "worse", "turned": "worse", "new": "appears"}, got)
}

func TestOnlyNewCautionsAreTold(t *testing.T) {
	before, after := assessed(), assessed()
	hot := func(t float64) caution.Caution {
		return caution.Caution{Code: caution.HotSurface, Pointer: "/stage/inductor", Value: t}
	}
	notice := caution.Caution{Code: caution.EstimatesOnly, Value: math.NaN()}
	before.Cautions, after.Cautions = []caution.Caution{notice, hot(80)}, []caution.Caution{notice, hot(80)}
	require.Empty(t, Judge(before, candidate(after), nil).Cautions)
	after.Cautions = []caution.Caution{notice, hot(95)}
	require.Equal(t, []caution.Caution{hot(95)}, Judge(before, candidate(after), nil).Cautions)
}

func TestRanking(t *testing.T) {
	hot := func(margin float64) rules.Finding {
		f := finding("hot", rules.Pass, margin)
		f.Unit = "Cel"
		return f
	}
	part := func(id string, loss, margin, cost float64) Candidate {
		a := assessed(hot(margin))
		a.Nominal[quantity.LossTotal] = loss
		return Candidate{ID: id, Role: "/stage/inductor", After: a, Cost: cost, Area: math.NaN()}
	}
	failing := part("failing", 0.1, 0.9, 0.1)
	failing.After.Report.Findings[0].Verdict = rules.Fail
	lacking := Candidate{ID: "lacking", Role: "/stage/inductor", Missing: []string{"/stage/inductor/inductance_h"}, Cost: 0.2, Area: math.NaN()}
	list := []Candidate{failing, lacking, part("no-cost", 1, 0.5, math.NaN()), part("dear", 1, 0.5, 2), part("cheap", 1.8, 0.4, 1)}
	ids := func(w Weights) (ids []string) {
		outcomes := Rank(assessed(hot(0.3)), list, nil, w)
		ids = make([]string, len(outcomes))
		for i, o := range outcomes {
			require.Equal(t, list[i].ID, o.ID, "in the order given")
			ids[o.Rank-1] = o.ID
		}
		return ids
	}
	require.Equal(t, []string{"no-cost", "dear", "cheap", "lacking", "failing"}, ids(Weights{Loss: 1, Temperature: 1}))
	require.Equal(t, []string{"cheap", "dear", "no-cost", "lacking", "failing"}, ids(Weights{Cost: 1}), "no cost, no place by cost")
	require.Equal(t, []string{"no-cost", "dear", "cheap", "lacking", "failing"}, ids(Weights{}), "no weights: the order given")
	o := Rank(assessed(hot(0.3)), list, nil, Weights{Loss: 2, Cost: 1})[4]
	require.Equal(t, "cheap", o.ID)
	require.InDelta(t, (2*0.9+1/0.1)/3, o.Score, 1e-12)
	require.InDelta(t, 0.6, o.Terms.Temperature, 1e-12)
	require.Equal(t, 1, o.Rank)
}
