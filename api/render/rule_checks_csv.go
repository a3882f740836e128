package render

import (
	"strings"

	"railproof/api/wire"
)

// RuleChecksCSV writes a line per finding.
func RuleChecksCSV(a *wire.RuleChecksAnswer) []byte {
	s := newSheet("rule", "severity", "verdict", "pointer", "value", "relation", "limit", "unit", headed("margin_ratio"), "corner", "missing", "detail", "pack", "edition", "waived_by", "waived_until", "worst_by")
	for i := range a.Findings {
		f := &a.Findings[i]
		at := make([]string, len(f.Corners))
		for k := range f.Corners {
			at[k] = cornerWords(&f.Corners[k])
		}
		by, until := "", ""
		if f.Waiver != nil {
			by, until = f.Waiver.Approver, f.Waiver.Expires
		}
		s.row(words(f.Rule), f.Severity, f.Verdict, f.Pointer, cell(f.Value), f.Relation, cell(f.Limit), f.Unit, cell(f.Margin),
			words(strings.Join(at, "; ")), words(strings.Join(f.Missing, " ")), words(f.Detail), words(f.Pack), words(f.Edition), words(by), until, f.WorstBy)
	}
	return s.bytes()
}

// cell writes a number, nothing for an absent one.
func cell(v *float64) string {
	if v == nil {
		return ""
	}
	return number(*v)
}
