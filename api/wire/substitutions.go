package wire

import (
	"strconv"

	"railproof/calc/quantity"
	"railproof/service"
	"railproof/service/substitution"
)

// SubstitutionsRequest asks which parts may replace those of a stage that a rule check
// describes.
type SubstitutionsRequest struct {
	RuleChecksRequest
	Replacements []Replacement `json:"replacements"`
	Weights      *RankWeights  `json:"weights,omitzero"`
	Quantities   []string      `json:"quantities,omitzero"`
}

// RankWeights are the weights of the ranking.
type RankWeights struct {
	Loss        *float64 `json:"loss_ratio,omitzero"`
	Temperature *float64 `json:"temperature_margin_ratio,omitzero"`
	Cost        *float64 `json:"cost_ratio,omitzero"`
	Area        *float64 `json:"area_ratio,omitzero"`
}

func (w *RankWeights) decode() substitution.Weights {
	if w == nil {
		w = new(RankWeights)
	}
	return substitution.Weights{Loss: or(w.Loss, 1), Temperature: or(w.Temperature, 1), Cost: or(w.Cost, 0), Area: or(w.Area, 0)}
}

// SubstitutionsAnswer holds what each replacement changes and the verdict on it.
type SubstitutionsAnswer struct {
	Head
	Status    string             `json:"status"`
	Overall   string             `json:"verdict"`
	Before    string             `json:"before_verdict"`
	Items     []SubstitutionItem `json:"items"`
	Packs     []PackUsed         `json:"packs"`
	Overrides []OverrideUsed     `json:"overrides,omitzero"`
	Basis
}

// Verdict is that over all replacements.
func (a *SubstitutionsAnswer) Verdict() string { return a.Overall }

// SubstitutionItem is one replacement.
type SubstitutionItem struct {
	ID         string               `json:"id,omitzero"`
	Role       string               `json:"role"`
	Verdict    string               `json:"verdict"`
	Status     string               `json:"status"`
	Rank       int                  `json:"rank,omitzero"`
	Score      *float64             `json:"score,omitzero"`
	Terms      *RankTerms           `json:"terms,omitzero"`
	Reasons    []SubstitutionReason `json:"reasons"`
	Missing    []string             `json:"missing"`
	Quantities []QuantityChange     `json:"quantities"`
	Findings   []FindingChange      `json:"findings"`
	Counts     *FindingCounts       `json:"counts,omitzero"`
	Cautions   []Caution            `json:"cautions,omitzero"`
}

// RankTerms is what a score is made of.
type RankTerms struct {
	Loss        *float64 `json:"loss_ratio,omitzero"`
	Temperature *float64 `json:"temperature_ratio,omitzero"`
	Cost        *float64 `json:"cost_ratio,omitzero"`
	Area        *float64 `json:"area_ratio,omitzero"`
}

// SubstitutionReason is one reason for a verdict.
type SubstitutionReason struct {
	Code    string `json:"code"`
	Rule    string `json:"rule,omitzero"`
	Pointer string `json:"pointer,omitzero"`
	Detail  string `json:"detail"`
}

// QuantityChange is a quantity that moves.
type QuantityChange struct {
	Quantity       string   `json:"quantity"`
	Unit           string   `json:"unit"`
	NominalBefore  *float64 `json:"nominal_before,omitzero"`
	NominalAfter   *float64 `json:"nominal_after,omitzero"`
	LeastBefore    *float64 `json:"least_before,omitzero"`
	LeastAfter     *float64 `json:"least_after,omitzero"`
	GreatestBefore *float64 `json:"greatest_before,omitzero"`
	GreatestAfter  *float64 `json:"greatest_after,omitzero"`
	Limit          *Limit   `json:"limit,omitzero"`
}

// FindingChange is a finding that differs.
type FindingChange struct {
	Change string   `json:"change"`
	Before *Finding `json:"before,omitzero"`
	After  *Finding `json:"after,omitzero"`
}

// Decode turns the request into the use case's. The error is an *InvalidError.
func (w *SubstitutionsRequest) Decode() (*service.SubstitutionsRequest, error) {
	p, err := w.RuleChecksRequest.Decode()
	if err != nil {
		return nil, err
	}
	r := &service.SubstitutionsRequest{Proof: *p, Weights: w.Weights.decode()}
	var faults []Fault
	for i, key := range w.Quantities {
		ids, fault := checkedIDs(key, p.Design.Stage, &p.Conditions.Control)
		if fault != "" {
			faults = append(faults, unknownQuantity("/quantities/"+strconv.Itoa(i), key, fault))
		}
		r.Proof.Further = append(r.Proof.Further, ids...)
	}
	for i := range w.Replacements {
		one, wrong := w.Replacements[i].decode("/replacements/"+strconv.Itoa(i), w.Stage, "/stage")
		faults = append(faults, wrong...)
		if one != nil {
			r.Replacements = append(r.Replacements, *one)
		}
	}
	if len(faults) > 0 {
		return nil, &InvalidError{faults}
	}
	return r, nil
}

// EncodeSubstitutions writes the answer.
func EncodeSubstitutions(r *service.SubstitutionsRequest, a *service.SubstitutionsAnswer, head Head) *SubstitutionsAnswer {
	w := &SubstitutionsAnswer{
		Head: head, Status: completeness(a.Complete), Overall: overallOf(a.Items), Before: a.Before.Verdict.String(),
		Packs: encodePacksUsed(r.Proof.Packs), Overrides: encodeOverrides(a.Before.Overrides), Basis: encodeBasis(&a.Basis),
	}
	for i := range a.Items {
		w.Items = append(w.Items, *encodeSubstitution(&a.Items[i], &r.Replacements[i], a.Corners))
	}
	return w
}

// overallOf is the gravest verdict: rejected, then needs-review, then accepted.
func overallOf(items []service.SubstitutionItem) string {
	worst := substitution.Accepted
	for i := range items {
		switch v := items[i].Verdict; {
		case v == substitution.Rejected, v == substitution.NeedsReview && worst == substitution.Accepted:
			worst = v
		}
	}
	return worst.String()
}

const (
	mostReasons = 256
	mostChanges = 128
)

func encodeSubstitution(a *service.SubstitutionItem, r *service.Replacement, before []service.WorstCorner) *SubstitutionItem {
	counts := countFindings(a.Report.Findings)
	w := &SubstitutionItem{
		ID: a.ID, Role: a.Role[len(r.Design.At)+1:], Verdict: a.Verdict.String(), Status: a.Status.String(), Rank: a.Rank, Score: given(&a.Score),
		Terms:   &RankTerms{given(&a.Terms.Loss), given(&a.Terms.Temperature), given(&a.Terms.Cost), given(&a.Terms.Area)},
		Reasons: []SubstitutionReason{}, Missing: []string{}, Quantities: []QuantityChange{}, Findings: []FindingChange{}, Counts: &counts,
	}
	for _, reason := range atMost(a.Reasons, mostReasons) {
		w.Reasons = append(w.Reasons, SubstitutionReason{reason.Code, reason.Rule, moved(reason.Pointer, r.Role, r.At), clipped(reason.Detail, longDetail)})
	}
	for _, m := range atMost(a.Missing, mostReasons) {
		w.Missing = append(w.Missing, moved(m, r.Role, r.At))
	}
	for i := range a.Moves {
		if change := encodeMove(&a.Moves[i]); change != nil && len(w.Quantities) < mostChanges {
			w.Quantities = append(w.Quantities, *change)
		}
	}
	for _, c := range a.Changes {
		change := FindingChange{Change: c.Kind.String()}
		if c.Before != nil {
			f := encodeFinding(c.Before, before)
			change.Before = &f
		}
		if c.After != nil {
			f := encodeFinding(c.After, a.Corners)
			change.After = &f
		}
		w.Findings = append(w.Findings, change)
	}
	for i := range atMost(a.Cautions, 64) {
		w.Cautions = append(w.Cautions, encodeCaution(&a.Cautions[i]))
	}
	return w
}

// encodeMove writes a quantity that somebody asked for: one with extremes, or the
// total loss, by which parts are ranked.
func encodeMove(m *substitution.Move) *QuantityChange {
	info, _ := quantity.Of(m.Quantity)
	w := &QuantityChange{
		Quantity: m.Quantity.Key(), Unit: info.Unit, NominalBefore: given(&m.NominalBefore), NominalAfter: given(&m.NominalAfter),
		LeastBefore: given(&m.LeastBefore), LeastAfter: given(&m.LeastAfter), GreatestBefore: given(&m.GreatestBefore), GreatestAfter: given(&m.GreatestAfter),
	}
	extremes := w.LeastBefore != nil || w.LeastAfter != nil || w.GreatestBefore != nil || w.GreatestAfter != nil
	if !extremes && m.Quantity != quantity.LossTotal {
		return nil
	}
	if low, high := given(&m.Min), given(&m.Max); low != nil || high != nil {
		w.Limit = &Limit{Quantity: w.Quantity, Min: low, Max: high}
	}
	return w
}
