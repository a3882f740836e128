package substitution

import (
	"fmt"
	"slices"
	"strings"

	"railproof/calc/caution"
	"railproof/calc/rules"
)

// Codes of reasons. The first three reject, the others ask for a review.
const (
	ReasonFails       = "rule-fails"
	ReasonWorse       = "failure-grows"
	ReasonDanger      = "dangerous"
	ReasonStillFails  = "fails-before-too"
	ReasonUnevaluated = "not-evaluated"
	ReasonMissing     = "data-missing"
	ReasonWaiver      = "waiver-of-another-part"
	ReasonIncomplete  = "check-incomplete"
	ReasonFailure     = "not-assessed"
)

func rejects(code string) bool {
	return code == ReasonFails || code == ReasonWorse || code == ReasonDanger
}

// weigh adds the reasons that one finding gives.
func (o *Outcome) weigh(c rules.Change, role string) {
	f := c.After
	if f == nil {
		o.weighLoss(c.Before, role)
		return
	}
	if f.Severity == rules.Note {
		return
	}
	was := rules.Pass
	if c.Before != nil {
		was = c.Before.Verdict
	}
	switch f.Verdict {
	case rules.Fail:
		switch {
		case was != rules.Fail:
			o.reason(ReasonFails, f.Rule, f.Pointer, f.Detail)
		case c.Kind == rules.Worse:
			o.reason(ReasonWorse, f.Rule, f.Pointer, "failed before too, by less: "+f.Detail)
		default:
			o.reason(ReasonStillFails, f.Rule, f.Pointer, "the proven stage fails it too: "+f.Detail)
		}
	case rules.NotEvaluated:
		if f.Severity == rules.Error || f.Rule == rules.RuleCoverage && c.Before == nil || c.Before != nil && was != rules.NotEvaluated {
			o.reason(ReasonUnevaluated, f.Rule, f.Pointer, f.Detail)
			o.Missing = append(o.Missing, f.Missing...)
		}
	case rules.Waived:
		switch {
		case within(f.Pointer, role):
			o.reason(ReasonWaiver, f.Rule, f.Pointer, "the waiver was granted for the part that is replaced")
		case was != rules.Waived || c.Kind == rules.Worse || c.Before.WaivedFrom != f.WaivedFrom:
			o.reason(ReasonWaiver, f.Rule, f.Pointer, "with this part it is worse than what the waiver was granted for: "+f.Detail)
		}
	case rules.Pass:
		if near(c) {
			o.reason(ReasonUnevaluated, f.Rule, f.Pointer, "passes by less than the shortened search for its worst value may miss; check the stage with this part by itself: "+f.Detail)
		}
	}
}

// weighLoss asks for a review where a rule that judged the present part does not apply
// to the new one. Rules for one kind of part are left to rules.RuleCoverage.
func (o *Outcome) weighLoss(b *rules.Finding, role string) {
	if b.Severity == rules.Note || b.Verdict == rules.NotEvaluated || b.ByKind || !within(b.Pointer, role) {
		return
	}
	o.reason(ReasonUnevaluated, b.Rule, b.Pointer, "the rule judged the present part and has nothing to say of this one")
}

// NeedsSearch reports whether an assessment made from the proven stage's worst points
// passes a rule too narrowly for that.
func NeedsSearch(before, after *Assessment) bool {
	return slices.ContainsFunc(rules.Compare(before.Report.Findings, after.Report.Findings), near)
}

// near reports whether a finding passes with a margin that has shrunk below what a
// search from the vertices of the proven stage may miss. Found on 96 parts of two rails
// with every figure between 0.6 and 1.5 times the present one, against the search by
// vertices that a check makes: at most 0.9 % of a loop's quantities, 5.0 % of a load
// step's and 7.1 % of its recovery.
func near(c rules.Change) bool {
	f := c.After
	if f == nil || f.Verdict != rules.Pass || f.WorstBy != rules.VerticesSeeded || c.Kind == rules.Unchanged || c.Kind == rules.Better {
		return false
	}
	missed := map[string]float64{"deg": 0.02, "dB": 0.02, "Hz": 0.02, "s": 0.1}[f.Unit]
	if missed == 0 {
		missed = 0.06
	}
	return f.Margin < missed
}

// within reports whether a pointer lies at or below another.
func within(pointer, above string) bool {
	return pointer == above || strings.HasPrefix(pointer, above+"/")
}

func (o *Outcome) weighCautions() {
	for _, c := range o.Cautions {
		if c.Code == caution.BeyondAbsoluteMaximum || c.Code == caution.ThermalRunaway {
			o.reason(ReasonDanger, "", c.Pointer, c.Detail)
		}
	}
}

// weighAssumptions asks for a review where the new part leaves out what the old
// one told: every figure then rests on a stand-in.
func (o *Outcome) weighAssumptions(before *Assessment, c *Candidate) {
	known := map[string]bool{}
	for _, at := range before.Assumed {
		known[at] = true
	}
	for _, at := range c.After.Assumed {
		if within(at, c.Role) && !known[at] {
			o.Missing = append(o.Missing, at)
			o.reason(ReasonMissing, "", at, "not given for this part; a stand-in value was used")
		}
	}
}

// settle draws the verdict from the reasons. A check that is not complete is
// never accepted.
func (o *Outcome) settle(after *Assessment) {
	o.Missing = unique(o.Missing)
	for _, r := range o.Reasons {
		if rejects(r.Code) {
			o.Verdict = Rejected
			return
		}
	}
	if len(o.Reasons) == 0 && after.Report.Verdict != rules.Passed {
		o.reason(ReasonIncomplete, "", o.Role, fmt.Sprintf("the check as a whole says %s", after.Report.Verdict))
	}
	if len(o.Reasons) == 0 {
		o.Verdict = Accepted
	}
}

// unique removes repetitions, keeping the order.
func unique(list []string) []string {
	seen := map[string]bool{}
	var out []string
	for _, s := range list {
		if !seen[s] {
			seen[s] = true
			out = append(out, s)
		}
	}
	return out
}
