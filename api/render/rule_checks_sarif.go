package render

import (
	"math"

	"railproof/api/wire"
	"railproof/calc/rules"
	"railproof/service/sarif"
)

// RuleChecksSARIF writes the findings as a SARIF 2.1.0 log. uri names the checked
// file and places its lines; both may be absent.
func RuleChecksSARIF(a *wire.RuleChecksAnswer, uri string, places sarif.Places) []byte {
	report := rules.Report{Verdict: overall[a.Overall], NotApplicable: a.NotApplicable}
	var corners []string
	for _, o := range a.Overrides {
		report.Overrides = append(report.Overrides, rules.Override(o))
	}
	for i := range a.Findings {
		f := findingOf(&a.Findings[i])
		for k := range a.Findings[i].Corners {
			f.Corners = append(f.Corners, len(corners))
			corners = append(corners, cornerWords(&a.Findings[i].Corners[k]))
		}
		report.Findings = append(report.Findings, f)
	}
	log, err := sarif.Write(&report, sarif.Options{
		ToolVersion: a.Engine.Version, InputURI: uri, Places: places,
		Corner: func(i int) string { return corners[i] },
	})
	if err != nil {
		return nil // the log holds no value that JSON cannot
	}
	return log
}

var (
	overall    = map[string]rules.Overall{"pass": rules.Passed, "fail": rules.Failed, "incomplete": rules.Incomplete}
	verdicts   = map[string]rules.Verdict{"pass": rules.Pass, "fail": rules.Fail, "waived": rules.Waived, "not-evaluated": rules.NotEvaluated}
	severities = map[string]rules.Severity{"error": rules.Error, "warning": rules.Warning, "note": rules.Note}
	searches   = map[string]rules.Search{"search": rules.InBox, "seeded-search": rules.InBoxSeeded, "vertices": rules.Vertices, "seeded-vertices": rules.VerticesSeeded}
	relations  = map[string]rules.Relation{"at-most": rules.AtMost, "at-least": rules.AtLeast}
)

// findingOf reads a finding back from its shape on the wire.
func findingOf(w *wire.Finding) rules.Finding {
	f := rules.Finding{
		Rule: w.Rule, Title: w.Title, Severity: severities[w.Severity], Pointer: w.Pointer, Relation: relations[w.Relation],
		Value: unknownOr(w.Value), Limit: unknownOr(w.Limit), Unit: w.Unit, Margin: unknownOr(w.Margin), ValueLow: unknownOr(w.ValueLow), ValueHigh: unknownOr(w.ValueHigh),
		WorstBy: searches[w.WorstBy], WithinBand: w.WithinBand != nil && *w.WithinBand, Verdict: verdicts[w.Verdict], WaivedFrom: verdicts[w.WaivedFrom],
		Missing: w.Missing, Beyond: w.Beyond, Detail: w.Detail, Basis: w.Basis, Pack: w.Pack, Edition: w.Edition, Provenance: w.Provenance, Origin: w.Origin,
	}
	if v := w.Waiver; v != nil {
		f.Waiver = &rules.Waiver{Rule: v.Rule, Pointer: v.Pointer, Reason: v.Reason, Approver: v.Approver}
		f.Waiver.Expires, _ = rules.ParseDate(v.Expires) // it was written from a date
	}
	return f
}

func unknownOr(v *float64) float64 {
	if v == nil {
		return math.NaN()
	}
	return *v
}
