// Package sarif writes rule-check reports in the Static Analysis Results
// Interchange Format 2.1.0 (OASIS Standard), so that what reads findings about
// code reads findings about power rails. Every result points at the place in the
// input by its JSON Pointer and, where the text is known, by its line.
package sarif

import (
	"encoding/json"
	"fmt"
	"math"

	"railproof/calc/rules"
)

// MediaType is the registered media type of the format.
const MediaType = "application/sarif+json"

const schemaURI = "https://docs.oasis-open.org/sarif/sarif/v2.1.0/errata01/os/schemas/sarif-schema-2.1.0.json"

// Options say what a report alone does not.
type Options struct {
	ToolVersion    string
	InformationURI string                 // page about the tool; "" for none
	InputURI       string                 // URI reference of the checked document; "" if it has none
	Places         Places                 // lines of the checked document; nil if not known
	Corner         func(index int) string // describes a corner; nil to leave corners out
}

// Write returns the report as a SARIF log.
//
// A failure has kind fail and the level of its severity; what could not be
// evaluated has kind open, a pass has kind pass. A waiver is a suppression, with
// its reason as the justification.
func Write(r *rules.Report, o Options) ([]byte, error) {
	w := writer{options: o, index: map[string]int{}}
	results := make([]result, 0, len(r.Findings))
	for i := range r.Findings {
		results = append(results, w.result(&r.Findings[i]))
	}
	one := run{
		Tool:        tool{component{Name: "railproof", Version: o.ToolVersion, InformationURI: o.InformationURI, Rules: w.rules}},
		Invocations: []invocation{{ExecutionSuccessful: true}},
		Results:     results,
		Properties:  &runBag{Verdict: r.Verdict.String(), NotApplicable: r.NotApplicable},
	}
	if one.Tool.Driver.Rules == nil {
		one.Tool.Driver.Rules = []descriptor{}
	}
	for _, v := range r.Overrides {
		one.Properties.Overrides = append(one.Properties.Overrides, override(v))
	}
	if o.InputURI != "" {
		one.Documents = []document{{documentLocation{URI: o.InputURI}}}
	}
	out, err := json.MarshalIndent(log{Schema: schemaURI, Version: "2.1.0", Runs: []run{one}}, "", "  ")
	if err != nil {
		return nil, fmt.Errorf("sarif: %w", err)
	}
	return append(out, '\n'), nil
}

type writer struct {
	options Options
	rules   []descriptor
	index   map[string]int // rule -> its place in rules
}

func (w *writer) rule(f *rules.Finding) int {
	if i, ok := w.index[f.Rule]; ok {
		return i
	}
	w.index[f.Rule] = len(w.rules)
	w.rules = append(w.rules, descriptor{
		ID: f.Rule, ShortDescription: text{f.Title}, FullDescription: text{f.Title + ". Basis: " + f.Basis + "."},
		Configuration: configuration{level(f.Severity)},
		Properties:    descriptorBag{f.Pack, f.Edition, f.Provenance, f.Basis, f.Origin},
	})
	return len(w.rules) - 1
}

func level(s rules.Severity) string {
	return [...]string{"error", "warning", "note"}[s]
}

func (w *writer) result(f *rules.Finding) result {
	verdict := f.Verdict
	if verdict == rules.Waived {
		verdict = f.WaivedFrom
	}
	r := result{RuleID: f.Rule, RuleIndex: w.rule(f), Kind: "open", Level: "none", Message: text{f.Detail}, Locations: []location{w.location(f.Pointer)}}
	switch verdict {
	case rules.Fail:
		r.Kind, r.Level = "fail", level(f.Severity)
	case rules.Pass:
		r.Kind = "pass"
	}
	r.Fingerprints = fingerprints{f.Rule + " " + f.Pointer}
	r.Properties = resultBag{
		Verdict: f.Verdict.String(), Relation: f.Relation.String(), Value: number(f.Value), Limit: number(f.Limit), Unit: f.Unit, Margin: number(f.Margin),
		ValueLow: number(f.ValueLow), ValueHigh: number(f.ValueHigh), WithinBand: f.WithinBand, WorstBy: f.WorstBy.String(), Missing: f.Missing, Beyond: f.Beyond,
	}
	if w.options.Corner != nil {
		for _, c := range f.Corners {
			r.Properties.Corners = append(r.Properties.Corners, w.options.Corner(c))
		}
	}
	if f.Verdict == rules.Waived && f.Waiver != nil {
		r.Suppressions = []suppression{{"external", "accepted", f.Waiver.Reason}}
		r.Properties.WaivedBy, r.Properties.WaivedTill = f.Waiver.Approver, f.Waiver.Expires.String()
	}
	return r
}

func (w *writer) location(pointer string) location {
	l := location{Logical: []logicalLocation{{FullyQualifiedName: pointer, Kind: "property"}}}
	if w.options.InputURI == "" {
		return l
	}
	first := 0
	l.Physical = &physicalLocation{Document: documentLocation{URI: w.options.InputURI, Index: &first}}
	if at, ok := w.options.Places.Find(pointer); ok {
		l.Physical.Region = &region{at.Line, at.Column}
	}
	return l
}

// number returns a figure, or nil for one that JSON cannot hold.
func number(x float64) *float64 {
	if math.IsNaN(x) || math.IsInf(x, 0) {
		return nil
	}
	return &x
}
