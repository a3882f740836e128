package wire

import (
	"railproof/calc/rules"
	"railproof/calc/stage"
	"railproof/service"
)

// Finding is one rule's verdict about one place in a stage.
type Finding struct {
	Rule       string   `json:"rule"`
	Title      string   `json:"title"`
	Severity   string   `json:"severity"`
	Verdict    string   `json:"verdict"`
	Pointer    string   `json:"pointer"`
	Relation   string   `json:"relation,omitzero"`
	Value      *float64 `json:"value,omitzero"`
	Limit      *float64 `json:"limit,omitzero"`
	Unit       string   `json:"unit,omitzero"`
	Margin     *float64 `json:"margin_ratio,omitzero"`
	ValueLow   *float64 `json:"value_low,omitzero"`
	ValueHigh  *float64 `json:"value_high,omitzero"`
	WithinBand *bool    `json:"within_band,omitzero"`
	Corners    []Corner `json:"corners,omitzero"`
	WorstBy    string   `json:"worst_by,omitzero"`
	Missing    []string `json:"missing,omitzero"`
	Beyond     []string `json:"beyond,omitzero"`
	Detail     string   `json:"detail"`
	Basis      string   `json:"basis,omitzero"`
	Pack       string   `json:"pack,omitzero"`
	Edition    string   `json:"edition,omitzero"`
	Provenance string   `json:"provenance,omitzero"`
	Origin     string   `json:"origin,omitzero"`
	WaivedFrom string   `json:"waived_from,omitzero"`
	Waiver     *Waiver  `json:"waiver,omitzero"`
}

// FindingCounts counts findings by verdict.
type FindingCounts struct {
	Pass         int `json:"pass"`
	Fail         int `json:"fail"`
	Waived       int `json:"waived"`
	NotEvaluated int `json:"not_evaluated"`
}

const (
	mostCorners = 16   // in one finding
	mostMissing = 64   // in one finding
	longDetail  = 1024 // [bytes]
)

func encodeFinding(f *rules.Finding, corners []service.WorstCorner) Finding {
	w := Finding{
		Rule: f.Rule, Title: f.Title, Severity: f.Severity.String(), Verdict: f.Verdict.String(), Pointer: f.Pointer,
		Value: given(&f.Value), Limit: given(&f.Limit), Unit: f.Unit, Margin: given(&f.Margin), ValueLow: given(&f.ValueLow), ValueHigh: given(&f.ValueHigh),
		WithinBand: mark(f.WithinBand), Missing: atMost(f.Missing, mostMissing), Beyond: atMost(f.Beyond, mostMissing), WorstBy: f.WorstBy.String(), Detail: clipped(f.Detail, longDetail),
		Basis: clipped(f.Basis, 512), Pack: f.Pack, Edition: f.Edition, Provenance: f.Provenance, Origin: f.Origin,
	}
	if f.Unit != "" {
		w.Relation = f.Relation.String()
	}
	for _, k := range atMost(f.Corners, mostCorners) {
		w.Corners = append(w.Corners, cornerOf(&corners[k].Point))
	}
	if f.Verdict == rules.Waived {
		w.WaivedFrom = f.WaivedFrom.String()
	}
	if f.Waiver != nil {
		w.Waiver = encodeWaiver(f.Waiver)
	}
	return w
}

// cornerOf writes the conditions of a point.
func cornerOf(p *stage.Point) Corner {
	c := Corner{Input: &p.Input, Ambient: &p.AmbientDegC, Age: &p.AgeRatio, Load: &p.Load.Current}
	if p.Load.Conductance > 0 {
		r := 1 / p.Load.Conductance
		c.Resistance = &r
		if p.Load.Current == 0 {
			c.Load = nil
		}
	}
	return c
}

func encodeFindings(list []rules.Finding, corners []service.WorstCorner) []Finding {
	w := make([]Finding, len(list))
	for i := range list {
		w[i] = encodeFinding(&list[i], corners)
	}
	return w
}

func countFindings(list []rules.Finding) (n FindingCounts) {
	for i := range list {
		switch list[i].Verdict {
		case rules.Pass:
			n.Pass++
		case rules.Fail:
			n.Fail++
		case rules.Waived:
			n.Waived++
		default:
			n.NotEvaluated++
		}
	}
	return n
}

func atMost[T any](list []T, n int) []T { return list[:min(len(list), n)] }

// clipped shortens a text to what the contract allows, between characters.
func clipped(s string, n int) string {
	if len(s) <= n {
		return s
	}
	n -= len("…")
	for n > 0 && s[n]&0xC0 == 0x80 {
		n--
	}
	return s[:n] + "…"
}
