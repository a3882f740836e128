package wire

// Stage is a power stage as the contract shows it. A field that was not given
// stays nil and is not written again.
type Stage struct {
	Name               string            `json:"name,omitzero"`
	Rectifier          string            `json:"rectifier"`
	PhaseCount         *Integer          `json:"phase_count,omitzero"`
	SwitchingFrequency *Number           `json:"switching_frequency_hz"`
	HighSide           *MOSFET           `json:"high_side"`
	LowSide            *MOSFET           `json:"low_side,omitzero"`
	Diode              *Diode            `json:"diode,omitzero"`
	Inductor           *Inductor         `json:"inductor"`
	OutputCapacitors   []*Capacitor      `json:"output_capacitors"`
	InputCapacitors    []*Capacitor      `json:"input_capacitors,omitzero"`
	Controller         *Controller       `json:"controller,omitzero"`
	Modulator          *Modulator        `json:"modulator,omitzero"`
	Compensator        *Compensator      `json:"compensator,omitzero"`
	Feedback           *Feedback         `json:"feedback,omitzero"`
	Board              *Board            `json:"board,omitzero"`
	Phases             []*PhaseOverride  `json:"phases,omitzero"`
	ThermalCouplings   []ThermalCoupling `json:"thermal_couplings,omitzero"`
}

// Feedback is the reference and its divider.
type Feedback struct {
	Reference *Number `json:"reference_v"`
	Upper     *Number `json:"upper_ohm"`
	Lower     *Number `json:"lower_ohm"`
}

// Board holds the copper paths.
type Board struct {
	InputPath      *Number `json:"input_path_ohm,omitzero"`
	OutputPath     *Number `json:"output_path_ohm,omitzero"`
	SwitchNodePath *Number `json:"switch_node_path_ohm,omitzero"`
}

// PhaseOverride holds what one phase has of its own.
type PhaseOverride struct {
	Inductance   *Number `json:"inductance_h,omitzero"`
	DCResistance *Number `json:"dc_resistance_ohm,omitzero"`
	HighSideOn   *Number `json:"high_side_on_resistance_ohm,omitzero"`
	LowSideOn    *Number `json:"low_side_on_resistance_ohm,omitzero"`
}

// ThermalCoupling is the rise of one part per watt in another.
type ThermalCoupling struct {
	A          string  `json:"a"`
	B          string  `json:"b"`
	Resistance float64 `json:"coupling_k_per_w"`
}
