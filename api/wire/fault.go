package wire

import (
	"errors"
	"strings"

	"railproof/calc/parts"
	"railproof/calc/stage"
)

// Fault is one thing in a document that cannot be taken: where it stands, what
// was given and what would be accepted.
type Fault struct {
	Pointer  string `json:"pointer"`            // RFC 6901, from the request's root
	Keyword  string `json:"keyword"`            // what was violated: "maximum", "spread", "physics"
	Detail   string `json:"detail"`             // for people
	Limit    any    `json:"limit,omitempty"`    // the bound that was crossed
	Received any    `json:"received,omitempty"` // what was given
	Unit     string `json:"unit,omitempty"`     // UCUM code of limit and received
}

// MaxFaults bounds the list of faults in one answer.
const MaxFaults = 50

// InvalidError lists every fault found in a readable document.
type InvalidError struct{ Faults []Fault }

// Error names the faults' places.
func (e *InvalidError) Error() string {
	at := make([]string, len(e.Faults))
	for i := range e.Faults {
		at[i] = e.Faults[i].Pointer
	}
	return "wire: invalid: " + strings.Join(at, ", ")
}

// Located turns the field ids of a *stage.InvalidError into pointers below
// root; any other error passes unchanged.
func Located(err error, root string) error {
	if physical, ok := errors.AsType[*stage.InvalidError](err); ok {
		return &InvalidError{physicalFaults(physical, root)}
	}
	return err
}

func physicalFaults(e *stage.InvalidError, root string) []Fault {
	faults := make([]Fault, len(e.Faults))
	for i, f := range e.Faults {
		at := root
		if f.Field != "" {
			at += "/" + f.Field
		}
		faults[i] = Fault{Pointer: at, Keyword: "physics", Detail: sentence(f.Detail, f.Accepted), Limit: known(f.Limit), Received: known(f.Given), Unit: UnitOf(at)}
		if !parts.Known(f.Given) {
			faults[i].Keyword = "required"
		}
	}
	return faults
}

func sentence(detail, accepted string) string {
	if accepted == "" {
		return detail
	}
	return detail + "; accepted: " + accepted
}

func known(v float64) any {
	if parts.Known(v) {
		return v
	}
	return nil
}

// EscapeToken writes one reference token of a JSON Pointer.
func EscapeToken(s string) string {
	return strings.ReplaceAll(strings.ReplaceAll(s, "~", "~0"), "/", "~1")
}
