package wire

import (
	"math"
	"strconv"

	"railproof/calc/quantity"
	"railproof/calc/rules"
	"railproof/calc/stage"
	"railproof/service"
)

// RuleChecksRequest asks whether a stage keeps to design rules.
type RuleChecksRequest struct {
	Stage       *Stage       `json:"stage"`
	Requirement *Requirement `json:"requirement"`
	Conditions  *Conditions  `json:"conditions,omitzero"`
	Limits      []Limit      `json:"limits,omitzero"`
	Packs       []PackChoice `json:"packs,omitzero"`
	Waivers     []Waiver     `json:"waivers,omitzero"`
	Date        string       `json:"date,omitzero"`
}

// RuleChecksAnswer holds the findings and the verdict over all.
type RuleChecksAnswer struct {
	Head
	Status        string         `json:"status"`
	Overall       string         `json:"verdict"`
	Counts        FindingCounts  `json:"counts"`
	Findings      []Finding      `json:"findings"`
	Packs         []PackUsed     `json:"packs"`
	Overrides     []OverrideUsed `json:"overrides,omitzero"`
	NotApplicable []string       `json:"not_applicable,omitzero"`
	Stage         *Stage         `json:"stage,omitzero"`
	Conditions    *Conditions    `json:"conditions,omitzero"`
	Limits        []Limit        `json:"limits,omitzero"`
	Basis
}

// Verdict is that over all findings.
func (a *RuleChecksAnswer) Verdict() string { return a.Overall }

// Decode turns the request into a proof. The error is an *InvalidError.
func (w *RuleChecksRequest) Decode() (*service.Proof, error) {
	return w.decode("")
}

// decode reads the proof that stands at a pointer of a request.
func (w *RuleChecksRequest) decode(root string) (*service.Proof, error) {
	p := &service.Proof{LimitsAt: root + "/limits", RequirementAt: root + "/requirement"}
	d, err := w.Stage.Decode(root + "/stage")
	faults := faultsOf(err)
	requirement, presumed, err := w.Requirement.decode(p.RequirementAt)
	faults = append(faults, faultsOf(err)...)
	var more []Fault
	p.Packs, more = choosePacks(root+"/packs", w.Packs)
	faults = append(faults, more...)
	p.Waivers, p.Date, more = decodeWaivers(w.Waivers, w.Date)
	faults = append(faults, more...)
	if d == nil || len(faults) > 0 {
		return nil, &InvalidError{faults}
	}
	p.Requirement, p.Presumed = requirement, presumed
	p.Design = service.Design{At: root + "/stage", Stage: d.Stage, Variables: d.Variables, Assumed: d.Assumed, Unused: d.Unused}
	p.At, p.Conditions = p.RequirementAt, service.ConditionsOf(&requirement, d.Stage)
	if w.Conditions != nil {
		p.At = root + "/conditions"
		p.Conditions, err = w.Conditions.Decode(p.At, d.Stage)
		faults = append(faults, faultsOf(err)...)
	} else {
		faults = append(faults, faultsOf(Located(p.Conditions.Check(d.Stage), p.At))...)
	}
	p.Limits, more = decodeProofLimits(p.LimitsAt, w.Limits, d.Stage, &p.Conditions)
	if faults = append(faults, more...); len(faults) > 0 {
		return nil, &InvalidError{faults}
	}
	return p, nil
}

// decodeProofLimits reads limits that are checked as rules; one on a per-bank
// quantity without a bank is one on every bank.
func decodeProofLimits(at string, list []Limit, s *stage.Stage, c *stage.Conditions) (limits []rules.Limit, faults []Fault) {
	for i := range list {
		l, here := &list[i], at+"/"+strconv.Itoa(i)
		one := rules.Limit{At: here, Min: or(l.Min, math.NaN()), Max: or(l.Max, math.NaN()), Where: l.where()}
		if wrong := l.faults(here); wrong != nil {
			faults = append(faults, wrong...)
			continue
		}
		if one.Min > one.Max {
			faults = append(faults, Fault{Pointer: here + "/min", Keyword: "limit", Detail: "min is above max: no value lies between", Limit: "up to " + figure(one.Max), Received: figure(one.Min)})
			continue
		}
		ids, fault := checkedIDs(l.Quantity, s, &c.Control)
		if fault != "" {
			faults = append(faults, unknownQuantity(here+"/quantity", l.Quantity, fault))
		}
		for _, id := range ids {
			one.Quantity = id
			limits = append(limits, one)
		}
	}
	return limits, faults
}

// checkedIDs returns the identifiers behind a key. Rules know the quantities of a
// load step too; whether they can be had is for the check to tell.
func checkedIDs(key string, s *stage.Stage, c *stage.Control) ([]quantity.ID, string) {
	if id, found := quantity.ByKey(key); found {
		if info, _ := quantity.Of(id); info.Group == quantity.Transient || info.Group == quantity.Loop {
			return []quantity.ID{id}, ""
		}
	}
	return proofIDs(key, &service.CornersRequest{Design: service.Design{Stage: s}, Conditions: stage.Conditions{Control: *c}})
}

// EncodeRuleChecks writes the answer to w.
func EncodeRuleChecks(w *RuleChecksRequest, p *service.Proof, a *service.RuleChecksAnswer, head Head) *RuleChecksAnswer {
	return &RuleChecksAnswer{
		Head: head, Status: completeness(a.Complete), Overall: a.Report.Verdict.String(),
		Counts: countFindings(a.Report.Findings), Findings: encodeFindings(a.Report.Findings, a.Corners),
		Packs: encodePacksUsed(p.Packs), Overrides: encodeOverrides(a.Report.Overrides), NotApplicable: a.Report.NotApplicable,
		Stage: w.Stage, Conditions: EncodeConditions(&p.Conditions), Limits: w.Limits, Basis: encodeBasis(&a.Basis),
	}
}

func completeness(complete bool) string {
	if complete {
		return "ok"
	}
	return "incomplete"
}
