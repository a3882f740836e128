package wire

// Limit bounds a quantity, in its unit.
type Limit struct {
	Quantity string   `json:"quantity"`
	Min      *float64 `json:"min,omitzero"`
	Max      *float64 `json:"max,omitzero"`
	At       string   `json:"at,omitzero"`
}
