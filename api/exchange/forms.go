package exchange

import (
	"fmt"
	"slices"

	"railproof/api/render"
	"railproof/api/wire"
	"railproof/openapi"
	"railproof/service/sarif"
)

const jsonForm = "application/json"

// renderer writes an answer's wire value in another form than JSON. It returns
// nil where the answer has none in that form.
type renderer func(value any) []byte

// TextForm is plain text for reading; the command line shows it.
const TextForm = "text/plain"

// renderers are the forms besides JSON, by operation and media type. A new one is
// a line here; HTTP gives those that the contract lists.
var renderers = map[string]map[string]renderer{
	"bomChecks": {
		"text/csv": func(v any) []byte { return render.BomChecksCSV(v.(*wire.BomChecksAnswer)) },
		TextForm:   func(v any) []byte { return []byte(render.BomChecksText(v.(*wire.BomChecksAnswer))) },
	},
	"corners": {
		"text/csv": func(v any) []byte { return render.CornersCSV(v.(*wire.CornersAnswer)) },
		TextForm:   func(v any) []byte { return []byte(render.CornersText(v.(*wire.CornersAnswer))) },
	},
	"loopGain": {
		"text/csv": func(v any) []byte { return render.LoopCSV(v.(*wire.LoopGainAnswer)) },
		TextForm:   func(v any) []byte { return []byte(render.LoopText(v.(*wire.LoopGainAnswer))) },
	},
	"losses": {
		"text/csv": func(v any) []byte { return render.LossesCSV(v.(*wire.LossesAnswer)) },
		TextForm:   func(v any) []byte { return []byte(render.LossesText(v.(*wire.LossesAnswer))) },
	},
	"ruleChecks": {
		"text/csv":      func(v any) []byte { return render.RuleChecksCSV(v.(*wire.RuleChecksAnswer)) },
		sarif.MediaType: func(v any) []byte { return render.RuleChecksSARIF(v.(*wire.RuleChecksAnswer), "", nil) },
		TextForm:        func(v any) []byte { return []byte(render.RuleChecksText(v.(*wire.RuleChecksAnswer))) },
	},
	"sizing": {
		TextForm: func(v any) []byte { return []byte(render.SizingText(v.(*wire.SizingAnswer))) },
	},
	"steadyState": {
		"text/csv": func(v any) []byte { return render.SteadyStateCSV(v.(*wire.SteadyStateAnswer)) },
		TextForm:   func(v any) []byte { return []byte(render.SteadyStateText(v.(*wire.SteadyStateAnswer))) },
	},
	"substitutions": {
		"text/csv": func(v any) []byte { return render.SubstitutionsCSV(v.(*wire.SubstitutionsAnswer)) },
		TextForm:   func(v any) []byte { return []byte(render.SubstitutionsText(v.(*wire.SubstitutionsAnswer))) },
	},
	"transients": {
		"text/csv": func(v any) []byte { return render.TransientsCSV(v.(*wire.TransientsAnswer)) },
		TextForm:   func(v any) []byte { return []byte(render.TransientsText(v.(*wire.TransientsAnswer))) },
	},
}

// Forms returns the media types in which the operation can be answered, the
// preferred one first.
func (x *Exchange) Forms(op openapi.Operation) []string {
	if !x.Computes(op.ID) {
		return op.MediaTypes
	}
	return slices.DeleteFunc(slices.Clone(op.MediaTypes), func(form string) bool {
		return !x.Gives(op.ID, form)
	})
}

// ownForm is the form that an operation's answers are kept in.
func ownForm(operation string) string {
	if operation == "reports" {
		return "text/html"
	}
	return jsonForm
}

// Render writes an answer in a form that Forms lists.
func (a *Answer) Render(form string) ([]byte, *Problem) {
	if form == ownForm(a.Operation) {
		return a.Body, nil
	}
	if Drawn(form) && Drawable(a.Operation) {
		return a.Draw(form, a.view)
	}
	render := renderers[a.Operation][form]
	if render == nil {
		return nil, problemOf(fmt.Errorf("exchange: no form %s of %s", form, a.Operation))
	}
	return render(a.Value), nil
}

// Gives reports whether the operation can be rendered in the form.
func (x *Exchange) Gives(operation, form string) bool {
	return x.Computes(operation) && (form == ownForm(operation) || renderers[operation][form] != nil || Drawn(form) && Drawable(operation))
}
