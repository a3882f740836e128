package substitution

import (
	"fmt"
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
	if f == nil || f.Severity == rules.Note {
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
		if f.Severity == rules.Error || c.Before != nil && was != rules.NotEvaluated {
			o.reason(ReasonUnevaluated, f.Rule, f.Pointer, f.Detail)
			o.Missing = append(o.Missing, f.Missing...)
		}
	case rules.Waived:
		if within(f.Pointer, role) {
			o.reason(ReasonWaiver, f.Rule, f.Pointer, "the waiver was granted for the part that is replaced")
		}
	}
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
