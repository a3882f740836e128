package wire

// Equation is one figure, how it follows, and where the formula stands.
type Equation struct {
	Quantity string  `json:"quantity"`
	Formula  string  `json:"formula"`
	Inserted string  `json:"inserted"`
	Value    float64 `json:"value"`
	Unit     string  `json:"unit"`
	Source   string  `json:"source"`
	Pointer  string  `json:"pointer,omitzero"`
}
