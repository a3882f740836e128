package wire

import (
	"encoding/json"
	"strconv"
)

// Number is a JSON number or, for a value with a tolerance, a spread object.
// It keeps what was written, so that it is written again unchanged.
type Number struct {
	Value  float64 // [any] the bare number, if Spread is nil
	Spread *Spread
}

// Spread is a value with its tolerance: {typ, tol}, {min, typ, max} or {min, max}.
type Spread struct {
	Min          *float64 `json:"min,omitzero"`
	Typ          *float64 `json:"typ,omitzero"`
	Max          *float64 `json:"max,omitzero"`
	Tol          *float64 `json:"tol,omitzero"`
	Distribution string   `json:"distribution,omitzero"`
	Group        string   `json:"group,omitzero"`
	MatchTol     *float64 `json:"match_tol,omitzero"`
}

// MarshalJSON writes what was read.
func (n Number) MarshalJSON() ([]byte, error) {
	if n.Spread != nil {
		return json.Marshal(n.Spread)
	}
	return appendFloat(nil, n.Value), nil
}

// UnmarshalJSON reads what was written.
func (n *Number) UnmarshalJSON(text []byte) error {
	if len(text) > 0 && text[0] == '{' {
		n.Spread = new(Spread)
		return json.Unmarshal(text, n.Spread)
	}
	return json.Unmarshal(text, &n.Value)
}

// appendText is MarshalJSON for AppendJSON.
func (n *Number) appendText(b []byte) ([]byte, error) {
	switch {
	case n == nil:
		return append(b, "null"...), nil
	case n.Spread != nil:
		return AppendJSON(b, n.Spread)
	}
	return appendFloat(b, n.Value), nil
}

// ContractValue returns what stands on the wire, for the check of answers.
func (n *Number) ContractValue() any {
	if n.Spread != nil {
		return n.Spread
	}
	return n.Value
}

// Of returns a bare number.
func Of(v float64) *Number { return &Number{Value: v} }

// appendFloat appends the shortest decimal that reads back as v, in the form that
// encoding/json writes.
func appendFloat(b []byte, v float64) []byte {
	abs := v
	if abs < 0 {
		abs = -abs
	}
	if abs != 0 && (abs < 1e-6 || abs >= 1e21) {
		b = strconv.AppendFloat(b, v, 'e', -1, 64)
		if n := len(b); n >= 4 && b[n-4] == 'e' && b[n-3] == '-' && b[n-2] == '0' {
			b[n-2] = b[n-1]
			b = b[:n-1]
		}
		return b
	}
	return strconv.AppendFloat(b, v, 'f', -1, 64)
}
