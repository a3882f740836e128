package wire

import (
	"railproof/calc/rules"
	"railproof/service"
	"railproof/service/bom"
)

// BomChecksAnswer tells whether a bill of material agrees with what was proven.
type BomChecksAnswer struct {
	Head
	Status  string           `json:"status"`
	Overall string           `json:"verdict"`
	Rails   []BomRailResult  `json:"rails"`
	Lines   []BomLineResult  `json:"lines"`
	Unbound []BomUnboundLine `json:"unbound_lines,omitzero"`
	Basis
}

// Verdict is that over all rails.
func (a *BomChecksAnswer) Verdict() string { return a.Overall }

// BomRailResult sums up one rail.
type BomRailResult struct {
	Name         string               `json:"name"`
	Verdict      string               `json:"verdict"`
	Lines        int                  `json:"lines"`
	Differences  int                  `json:"differences"`
	NotEvaluated int                  `json:"not_evaluated,omitzero"`
	Missing      []string             `json:"missing_designators,omitzero"`
	Unbound      []string             `json:"unbound_designators,omitzero"`
	Roles        []BomRoleResult      `json:"roles,omitzero"`
	Alternates   []BomAlternateResult `json:"alternates,omitzero"`
}

// BomRoleResult holds differences about a role as a whole.
type BomRoleResult struct {
	Role        string          `json:"role"`
	Differences []BomDifference `json:"differences"`
}

// BomAlternateResult is an approved alternate, run as a substitution.
type BomAlternateResult struct {
	Role         string           `json:"role"`
	PartNumber   string           `json:"part_number"`
	Substitution SubstitutionItem `json:"substitution"`
}

// BomLineResult is one line in one role.
type BomLineResult struct {
	Line        *int            `json:"line,omitzero"`
	Designators []string        `json:"designators"`
	Rail        string          `json:"rail,omitzero"`
	Role        string          `json:"role,omitzero"`
	Verdict     string          `json:"verdict"`
	Differences []BomDifference `json:"differences,omitzero"`
	PartNumber  string          `json:"part_number,omitzero"`
}

// BomDifference is one aspect in which a line differs or could not be compared.
type BomDifference struct {
	Field       string   `json:"field"`
	Verdict     string   `json:"verdict"`
	Proven      string   `json:"proven,omitzero"`
	Found       string   `json:"found,omitzero"`
	ProvenValue *float64 `json:"proven_value,omitzero"`
	FoundValue  *float64 `json:"found_value,omitzero"`
	Unit        string   `json:"unit,omitzero"`
	Detail      string   `json:"detail"`
}

// BomUnboundLine is a line that looks as if it belonged to a rail.
type BomUnboundLine struct {
	Rail        string   `json:"rail"`
	Row         int      `json:"line,omitzero"`
	Designators []string `json:"designators"`
	Value       string   `json:"value,omitzero"`
	PartNumber  string   `json:"part_number,omitzero"`
}

const (
	mostLines       = 20000
	mostDesignators = 1000
	mostUnbound     = 5000
	mostDifferences = 16
)

// EncodeBomChecks writes the answer.
func EncodeBomChecks(r *service.BomChecksRequest, a *service.BomChecksAnswer, head Head) *BomChecksAnswer {
	w := &BomChecksAnswer{Head: head, Status: completeness(a.Complete), Overall: agreement(a.Report.Verdict), Lines: []BomLineResult{}, Basis: encodeBasis(&a.Basis)}
	for i := range atMost(a.Lines, mostLines) {
		w.Lines = append(w.Lines, encodeBomLine(&a.Lines[i]))
	}
	for i := range a.Report.Rails {
		rail := encodeBomRail(&a.Report.Rails[i])
		if of := a.Rails[i]; of != nil {
			for k := range of.Items {
				alternate := &r.Rails[i].Alternates[k]
				item := encodeSubstitution(&of.Items[k], &alternate.Replacement, of.Corners)
				item.Rank, item.Score, item.Terms = 0, nil, nil
				rail.Alternates = append(rail.Alternates, BomAlternateResult{alternate.Role, alternate.PartNumber, *item})
			}
		}
		w.Rails = append(w.Rails, rail)
		for _, u := range a.Report.Rails[i].Unbound {
			if len(w.Unbound) < mostLines {
				w.Unbound = append(w.Unbound, BomUnboundLine(u))
			}
		}
	}
	return w
}

func agreement(v rules.Overall) string {
	return map[rules.Overall]string{rules.Passed: "agrees", rules.Failed: "differs", rules.Incomplete: "incomplete"}[v]
}

func encodeBomLine(l *bom.LineResult) BomLineResult {
	w := BomLineResult{Designators: l.Designators, Rail: l.Rail, Role: l.Role, Verdict: l.Verdict.String(), Differences: differences(l.Findings)}
	if l.Row > 0 {
		w.Line = &l.Row
	}
	if l.Alternate != nil {
		w.PartNumber = clipped(l.Alternate.PartNumber, 128)
	}
	return w
}

func encodeBomRail(r *bom.RailReport) BomRailResult {
	w := BomRailResult{Name: r.Name, Verdict: agreement(r.Verdict)}
	rows, roles := map[int]bool{}, map[string][]bom.Finding{}
	var order []string
	for _, f := range r.Findings {
		switch f.Verdict {
		case rules.Fail:
			w.Differences++
		case rules.NotEvaluated:
			w.NotEvaluated++
		}
		switch {
		case f.Row > 0:
			rows[f.Row] = true
		case f.Aspect == bom.AspectPresent && f.Verdict == rules.Fail:
			w.Missing = append(w.Missing, f.Designators...)
		case f.Verdict != rules.Pass:
			if roles[f.Role] == nil {
				order = append(order, f.Role)
			}
			roles[f.Role] = append(roles[f.Role], f)
		}
	}
	w.Lines = len(rows)
	for _, role := range order {
		w.Roles = append(w.Roles, BomRoleResult{role, differences(roles[role])})
	}
	for _, u := range r.Unbound {
		w.Unbound = append(w.Unbound, u.Designators...)
	}
	w.Missing, w.Unbound = atMost(w.Missing, mostDesignators), atMost(w.Unbound, mostUnbound)
	return w
}

// differences lists what differs or could not be compared.
func differences(list []bom.Finding) []BomDifference {
	var w []BomDifference
	for i := range list {
		f := &list[i]
		if f.Verdict == rules.Pass || len(w) == mostDifferences {
			continue
		}
		d := BomDifference{Field: f.Aspect, Verdict: f.Verdict.String(), Proven: clipped(f.Proven, 256), Found: clipped(f.Found, 256), Detail: clipped(f.Detail, 512)}
		if f.Unit != "" {
			d.Unit, d.ProvenValue, d.FoundValue = f.Unit, given(&f.ProvenValue), given(&f.FoundValue)
		}
		w = append(w, d)
	}
	return w
}
