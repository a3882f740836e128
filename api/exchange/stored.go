package exchange

import (
	"encoding/json"
	"fmt"
	"slices"

	"railproof/api/wire"
	"railproof/service/results"
)

// answers are the wire values that kept answers in JSON are read into, to be shown in
// other forms.
var answers = map[string]func() any{
	"bomChecks":     func() any { return new(wire.BomChecksAnswer) },
	"corners":       func() any { return new(wire.CornersAnswer) },
	"loopGain":      func() any { return new(wire.LoopGainAnswer) },
	"losses":        func() any { return new(wire.LossesAnswer) },
	"ruleChecks":    func() any { return new(wire.RuleChecksAnswer) },
	"sizing":        func() any { return new(wire.SizingAnswer) },
	"steadyState":   func() any { return new(wire.SteadyStateAnswer) },
	"substitutions": func() any { return new(wire.SubstitutionsAnswer) },
	"transients":    func() any { return new(wire.TransientsAnswer) },
}

// KeptForms returns the media types in which a kept answer can be shown, its own
// first.
func (x *Exchange) KeptForms(kept results.Answer) []string {
	forms := []string{kept.Media}
	if answers[kept.Operation] == nil || kept.Media != jsonForm {
		return forms
	}
	for _, op := range x.contract.Operations() {
		if op.ID != kept.Operation {
			continue
		}
		for _, form := range x.Forms(op) {
			if !slices.Contains(forms, form) {
				forms = append(forms, form)
			}
		}
	}
	return forms
}

// Show writes a kept answer in one of its forms; the view is that of a picture.
func Show(kept results.Answer, form string, v View) ([]byte, *Problem) {
	if form == kept.Media {
		return kept.Body, nil
	}
	value := answers[kept.Operation]()
	if err := json.Unmarshal(kept.Body, value); err != nil {
		return nil, problemOf(fmt.Errorf("exchange: a kept answer of %s cannot be read: %w", kept.Operation, err))
	}
	a := &Answer{Operation: kept.Operation, Value: value, Body: kept.Body, view: v}
	return a.Render(form)
}
