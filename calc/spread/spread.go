// Package spread describes values with a tolerance and flattens a document's
// spreads into independent coordinates.
package spread

// Distribution is the law of a value between its ends.
type Distribution uint8

const (
	Uniform    Distribution = iota
	Triangular              // mode at the typical value
	Normal                  // mode at the typical value, sigma = (max - min)/6, truncated at the ends
)

// Variable is one spread of a document, named by its JSON Pointer.
type Variable struct {
	Pointer       string  // RFC 6901, from the request's root: /stage/inductor/inductance_h
	Field         string  // stage field id: inductor/inductance_h
	Min, Typ, Max float64 // [any] in the field's unit, Min <= Typ <= Max
	Distribution  Distribution
	Group         string  // members of one group share a coordinate; empty: on its own
	MatchTol      float64 // [1] independent relative residual of a group's member
}

// At returns the value at coordinate z in [-1, 1], linear on each side: exactly
// Typ at 0, Min at -1 and Max at 1.
func (v *Variable) At(z float64) float64 {
	switch {
	case z == 1:
		return v.Max
	case z == -1:
		return v.Min
	case z >= 0:
		return v.Typ + float64(z*(v.Max-v.Typ))
	}
	return v.Typ + float64(z*(v.Typ-v.Min))
}
