package spread

import "strings"

// Fault is one contradiction among a document's spreads.
type Fault struct {
	Pointer string  // RFC 6901, of the spread that is at fault
	Keyword string  // what was broken: order, width, group, match_tol, duplicate
	Given   float64 // [any] the number at fault, in the field's unit
	Limit   float64 // [any] the bound that it crossed
	Detail  string  // a plain sentence
}

// InvalidError lists every fault at once.
type InvalidError struct{ Faults []Fault }

// Error names the pointers at fault.
func (e *InvalidError) Error() string {
	at := make([]string, len(e.Faults))
	for i, f := range e.Faults {
		at[i] = f.Pointer
	}
	return "spread: invalid: " + strings.Join(at, ", ")
}
