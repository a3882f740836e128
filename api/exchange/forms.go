package exchange

import (
	"fmt"
	"slices"

	"railproof/api/render"
	"railproof/api/wire"
	"railproof/openapi"
)

const jsonForm = "application/json"

// renderer writes an answer's wire value in another form than JSON. It returns
// nil where the answer has none in that form.
type renderer func(value any) []byte

// renderers are the forms besides JSON, by operation and media type. A new one is
// a line here.
var renderers = map[string]map[string]renderer{
	"losses": {"text/csv": func(v any) []byte { return render.LossesCSV(v.(*wire.LossesAnswer)) }},
}

// Forms returns the media types in which the operation can be answered, the
// preferred one first.
func (x *Exchange) Forms(op openapi.Operation) []string {
	if !x.Computes(op.ID) {
		return op.MediaTypes
	}
	return slices.DeleteFunc(slices.Clone(op.MediaTypes), func(form string) bool {
		return form != jsonForm && renderers[op.ID][form] == nil
	})
}

// Render writes an answer in a form that Forms lists.
func (a *Answer) Render(form string) ([]byte, *Problem) {
	if form == jsonForm {
		return a.Body, nil
	}
	render := renderers[a.Operation][form]
	if render == nil {
		return nil, problemOf(fmt.Errorf("exchange: no form %s of %s", form, a.Operation))
	}
	return render(a.Value), nil
}
