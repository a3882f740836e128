package wire

import (
	"encoding/json"
	"fmt"

	"railproof/calc/rules"
	"railproof/service"
	"railproof/service/packs"
)

// RulePack is a set of design rules as data.
type RulePack packs.Document

func (p *RulePack) readTree(v any) error {
	raw, err := json.Marshal(v)
	if err != nil {
		return fmt.Errorf("wire: rule pack: %w", err)
	}
	parsed, err := packs.Parse(raw)
	if err != nil {
		return fmt.Errorf("wire: %w", err)
	}
	*p = RulePack(parsed.Document)
	return nil
}

// MarshalJSON writes the document.
func (p RulePack) MarshalJSON() ([]byte, error) { return json.Marshal(packs.Document(p)) }

// ContractValue returns what stands on the wire, for the check of answers.
func (p *RulePack) ContractValue() any {
	raw, err := json.Marshal(p)
	if err != nil {
		return nil
	}
	var tree any
	if json.Unmarshal(raw, &tree) != nil {
		return nil
	}
	return tree
}

// PackChoice is a pack by its id, or a document.
type PackChoice struct {
	ID   string    `json:"id,omitzero"`
	Pack *RulePack `json:"pack,omitzero"`
}

func choosePacks(at string, list []PackChoice) ([]packs.Entry, []Fault) {
	choices := make([]service.PackChoice, len(list))
	for i := range list {
		choices[i] = service.PackChoice{ID: list[i].ID, Document: (*packs.Document)(list[i].Pack)}
	}
	chosen, refused := service.ChoosePacks(at, choices)
	return chosen, refusals(refused)
}

func refusals(list []service.Refusal) []Fault {
	var faults []Fault
	for _, f := range list {
		faults = append(faults, Fault{Pointer: f.Pointer, Keyword: f.Keyword, Detail: f.Detail, Limit: f.Limit, Received: f.Received})
	}
	return faults
}

// PackUsed names a pack that was checked.
type PackUsed struct {
	ID         string `json:"id"`
	Title      string `json:"title,omitzero"`
	Edition    string `json:"edition"`
	Provenance string `json:"provenance,omitzero"`
	Extends    string `json:"extends,omitzero"`
}

func encodePacksUsed(list []packs.Entry) []PackUsed {
	w := make([]PackUsed, len(list))
	for i, e := range list {
		w[i] = PackUsed{e.Pack.ID, e.Pack.Title, e.Pack.Edition, e.Pack.Provenance, e.Document.Extends}
	}
	return w
}

// OverrideUsed is what a derived pack changed in the pack it extends.
type OverrideUsed struct {
	Pack   string `json:"pack"`
	Target string `json:"target"`
	What   string `json:"what"`
	From   string `json:"from"`
	To     string `json:"to"`
	Reason string `json:"reason"`
}

func encodeOverrides(list []rules.Override) []OverrideUsed {
	var w []OverrideUsed
	for _, o := range list {
		w = append(w, OverrideUsed(o))
	}
	return w
}

// RulePackSummary is a pack in the list of packs.
type RulePackSummary struct {
	ID         string `json:"id"`
	Title      string `json:"title"`
	Edition    string `json:"edition"`
	Provenance string `json:"provenance"`
	Rules      int    `json:"rules"`
}

// RulePacksAnswer lists the packs of the service.
type RulePacksAnswer struct {
	Engine Engine            `json:"engine"`
	Packs  []RulePackSummary `json:"packs"`
}

// EncodeRulePacks lists the packs of the service.
func EncodeRulePacks(e Engine) *RulePacksAnswer {
	a := &RulePacksAnswer{Engine: e}
	for _, p := range service.RulePacks() {
		a.Packs = append(a.Packs, RulePackSummary{p.Pack.ID, p.Pack.Title, p.Pack.Edition, p.Pack.Provenance, len(p.Pack.Rules)})
	}
	return a
}

// RulePackAnswer is one pack of the service.
type RulePackAnswer struct {
	Engine Engine    `json:"engine"`
	Pack   *RulePack `json:"pack"`
}

// EncodeRulePackDocuments returns every pack of the service by its id.
func EncodeRulePackDocuments(e Engine) map[string]*RulePackAnswer {
	m := map[string]*RulePackAnswer{}
	for _, p := range service.RulePacks() {
		m[p.Pack.ID] = &RulePackAnswer{e, (*RulePack)(p.Document)}
	}
	return m
}
