package wire

import "railproof/calc/rules"

// Limit bounds a quantity, in its unit.
type Limit struct {
	Quantity string   `json:"quantity"`
	Min      *float64 `json:"min,omitzero"`
	Max      *float64 `json:"max,omitzero"`
	At       string   `json:"at,omitzero"`
	FullLoad *bool    `json:"full_load,omitzero"`
}

// nominal is the place of a limit that holds at typical values and conditions.
const nominal = "nominal"

// where tells where the limit must hold.
func (l *Limit) where() rules.Where {
	switch {
	case l.At == nominal:
		return rules.AtNominal
	case isTrue(l.FullLoad):
		return rules.AtFullLoad
	}
	return rules.AtWorst
}

// holds sets where the limit must hold.
func (l *Limit) holds(where rules.Where) {
	if where == rules.AtNominal {
		l.At = nominal
	}
	l.FullLoad = mark(where == rules.AtFullLoad)
}

// faults tells what is contradictory in the limit written at the pointer.
func (l *Limit) faults(at string) []Fault {
	switch {
	case l.Min == nil && l.Max == nil:
		return []Fault{{Pointer: at, Keyword: "limit", Detail: "a limit needs min, max or both"}}
	case l.At == nominal && isTrue(l.FullLoad):
		return []Fault{{Pointer: at + "/full_load", Keyword: "limit", Detail: "full load is not nominal: give at or full_load", Received: "true"}}
	}
	return nil
}
