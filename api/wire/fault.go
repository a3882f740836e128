package wire

import (
	"errors"
	"strconv"
	"strings"

	"railproof/calc/parts"
	"railproof/calc/stage"
)

// Fault is one thing in a document that cannot be taken: where it stands, what
// was given and what would be accepted.
type Fault struct {
	Pointer  string `json:"pointer"`           // RFC 6901, from the request's root
	Keyword  string `json:"keyword"`           // what was violated: "maximum", "spread", "physics"
	Detail   string `json:"detail"`            // for people
	Limit    string `json:"limit,omitzero"`    // what is accepted
	Received string `json:"received,omitzero"` // what was given
	Unit     string `json:"unit,omitzero"`     // UCUM code of limit and received
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
		faults[i] = Fault{Pointer: at, Keyword: "physics", Detail: f.Detail, Limit: f.Accepted, Received: figure(f.Given), Unit: UnitOf(at)}
		if !parts.Known(f.Limit) && !parts.Known(f.Given) {
			faults[i].Keyword = "required"
		}
	}
	return faults
}

// figure writes a number for people and machines alike; nothing for an unknown.
func figure(v float64) string {
	if !parts.Known(v) {
		return ""
	}
	return strconv.FormatFloat(v, 'g', -1, 64)
}

// EscapeToken writes one reference token of a JSON Pointer.
func EscapeToken(s string) string {
	return strings.ReplaceAll(strings.ReplaceAll(s, "~", "~0"), "/", "~1")
}

// faultsOf returns the faults of an *InvalidError, none of a nil error. Any other
// error is a fault of this package's caller.
func faultsOf(err error) []Fault {
	if err == nil {
		return nil
	}
	invalid, ok := errors.AsType[*InvalidError](err)
	if !ok {
		panic("wire: a check that reports no faults")
	}
	return invalid.Faults
}
