package wire

// MOSFET is a switch of the half bridge.
type MOSFET struct {
	PartNumber         string           `json:"part_number,omitzero"`
	Assumed            *bool            `json:"assumed,omitzero"`
	OnResistance       *Number          `json:"on_resistance_ohm"`
	OnResistanceTemp   []JunctionFactor `json:"on_resistance_temp,omitzero"`
	OnResistanceDrive  []DriveFactor    `json:"on_resistance_drive,omitzero"`
	GateCharge         *Number          `json:"gate_charge_c,omitzero"`
	GateSwitchCharge   *Number          `json:"gate_switch_charge_c,omitzero"`
	GateSwitchChargeAt *float64         `json:"gate_switch_charge_at_v,omitzero"`
	Plateau            *Number          `json:"plateau_v,omitzero"`
	InternalGate       *Number          `json:"internal_gate_ohm,omitzero"`
	OutputCharge       *Number          `json:"output_charge_c,omitzero"`
	OutputChargeAt     *float64         `json:"output_charge_at_v,omitzero"`
	OutputChargeTable  []VoltageCharge  `json:"output_charge_table,omitzero"`
	RecoveryCharge     *Number          `json:"recovery_charge_c,omitzero"`
	BodyDiode          *Number          `json:"body_diode_v,omitzero"`
	Rating             *MOSFETRating    `json:"rating,omitzero"`
	Thermal            *Thermal         `json:"thermal,omitzero"`
}

// MOSFETRating holds absolute maximum ratings.
type MOSFETRating struct {
	DrainSource  *float64 `json:"drain_source_v,omitzero"`
	GateSource   *float64 `json:"gate_source_v,omitzero"`
	DrainCurrent *float64 `json:"drain_current_a,omitzero"`
	Junction     *float64 `json:"junction_degc,omitzero"`
}

// Thermal is a part's path to ambient.
type Thermal struct {
	JunctionToAmbient *Number `json:"junction_to_ambient_k_per_w,omitzero"`
}

// Diode is the rectifier of a diode-rectified stage.
type Diode struct {
	PartNumber       string            `json:"part_number,omitzero"`
	Assumed          *bool             `json:"assumed,omitzero"`
	Threshold        *Number           `json:"threshold_v"`
	Slope            *Number           `json:"slope_ohm,omitzero"`
	ThresholdTemp    *Number           `json:"threshold_temp_v_per_k,omitzero"`
	JunctionCharge   *Number           `json:"junction_charge_c,omitzero"`
	JunctionChargeAt *float64          `json:"junction_charge_at_v,omitzero"`
	RecoveryCharge   *Number           `json:"recovery_charge_c,omitzero"`
	Leakage          []JunctionCurrent `json:"leakage,omitzero"`
	Rating           *DiodeRating      `json:"rating,omitzero"`
	Thermal          *Thermal          `json:"thermal,omitzero"`
}

// DiodeRating holds absolute maximum ratings.
type DiodeRating struct {
	Reverse  *float64 `json:"reverse_v,omitzero"`
	Forward  *float64 `json:"forward_a,omitzero"`
	Junction *float64 `json:"junction_degc,omitzero"`
}

// Inductor is the energy store of one phase.
type Inductor struct {
	PartNumber          string          `json:"part_number,omitzero"`
	Assumed             *bool           `json:"assumed,omitzero"`
	Inductance          *Number         `json:"inductance_h"`
	InductanceAtCurrent []CurrentFactor `json:"inductance_at_current,omitzero"`
	DCResistance        *Number         `json:"dc_resistance_ohm,omitzero"`
	ACResistanceRatio   *Number         `json:"ac_resistance_ratio,omitzero"`
	Core                *Core           `json:"core,omitzero"`
	Rating              *InductorRating `json:"rating,omitzero"`
	Thermal             *Thermal        `json:"thermal,omitzero"`
}

// Core describes the core loss.
type Core struct {
	Steinmetz *Steinmetz   `json:"steinmetz"`
	Turns     *Integer     `json:"turns"`
	Area      *float64     `json:"area_m2"`
	Volume    *float64     `json:"volume_m3"`
	Temp      []CoreFactor `json:"temp,omitzero"`
	Band      *Band        `json:"band,omitzero"`
}

// Steinmetz holds the coefficients for a sine of flux-density amplitude, in SI.
type Steinmetz struct {
	K     *Number  `json:"k"`
	Alpha *float64 `json:"alpha"`
	Beta  *float64 `json:"beta"`
}

// Band is the range of factors within which a model is right.
type Band struct {
	Low  *float64 `json:"low_ratio,omitzero"`
	High *float64 `json:"high_ratio,omitzero"`
}

// InductorRating holds the limits of the data sheet.
type InductorRating struct {
	Saturation *float64 `json:"saturation_a,omitzero"`
	Heating    *float64 `json:"heating_a,omitzero"`
	Winding    *float64 `json:"winding_degc,omitzero"`
}

// Capacitor is one bank of equal pieces.
type Capacitor struct {
	PartNumber        string            `json:"part_number,omitzero"`
	Assumed           *bool             `json:"assumed,omitzero"`
	Kind              string            `json:"kind,omitzero"`
	Capacitance       *Number           `json:"capacitance_f"`
	Count             *Integer          `json:"count,omitzero"`
	ESR               *Number           `json:"esr_ohm,omitzero"`
	ESL               *Number           `json:"esl_h,omitzero"`
	CapacitanceAtBias []BiasFactor      `json:"capacitance_at_bias,omitzero"`
	CapacitanceTemp   []CapacitorFactor `json:"capacitance_temp,omitzero"`
	ESRTemp           []CapacitorFactor `json:"esr_temp,omitzero"`
	Ageing            []AgeFactor       `json:"ageing,omitzero"`
	Rating            *CapacitorRating  `json:"rating,omitzero"`
	Life              *CapacitorLife    `json:"life,omitzero"`
	Thermal           *Thermal          `json:"thermal,omitzero"`
}

// CapacitorRating holds the limits of the data sheet, per piece.
type CapacitorRating struct {
	Voltage       *float64 `json:"voltage_v,omitzero"`
	RippleCurrent *float64 `json:"ripple_current_a,omitzero"`
	Temperature   *float64 `json:"temperature_degc,omitzero"`
}

// CapacitorLife holds an endurance statement.
type CapacitorLife struct {
	Rated           *float64 `json:"rated_s,omitzero"`
	RatedRise       *float64 `json:"rated_rise_k,omitzero"`
	FrequencyFactor *float64 `json:"frequency_factor_ratio,omitzero"`
}

// Controller drives the switches.
type Controller struct {
	PartNumber       string            `json:"part_number,omitzero"`
	Assumed          *bool             `json:"assumed,omitzero"`
	Drive            *Number           `json:"drive_v,omitzero"`
	GateOn           *Number           `json:"gate_on_ohm,omitzero"`
	GateOff          *Number           `json:"gate_off_ohm,omitzero"`
	DeadTime         *Number           `json:"dead_time_s,omitzero"`
	MinOnTime        *Number           `json:"min_on_time_s,omitzero"`
	MinOffTime       *Number           `json:"min_off_time_s,omitzero"`
	MaxDutyRatio     *Number           `json:"max_duty_ratio,omitzero"`
	QuiescentCurrent *Number           `json:"quiescent_current_a,omitzero"`
	DriveSupply      string            `json:"drive_supply,omitzero"`
	AuxiliaryPower   *Number           `json:"auxiliary_power_w,omitzero"`
	Rating           *ControllerRating `json:"rating,omitzero"`
	Thermal          *Thermal          `json:"thermal,omitzero"`
}

// ControllerRating holds absolute maximum ratings.
type ControllerRating struct {
	Input    *float64 `json:"input_v,omitzero"`
	Junction *float64 `json:"junction_degc,omitzero"`
}

// Modulator turns the control voltage into a duty ratio.
type Modulator struct {
	Mode          string   `json:"mode"`
	Ramp          *Number  `json:"ramp_v,omitzero"`
	FeedForward   *bool    `json:"feed_forward,omitzero"`
	FeedForwardAt *float64 `json:"feed_forward_at_v,omitzero"`
	Sense         *Number  `json:"sense_ohm,omitzero"`
	Slope         *Number  `json:"slope_v_per_s,omitzero"`
	Delay         *Number  `json:"delay_s,omitzero"`
	CurrentLimit  *float64 `json:"current_limit_a,omitzero"`
}

// Compensator is the error amplifier with its network.
type Compensator struct {
	Type             string  `json:"type"`
	FeedbackOhm      *Number `json:"feedback_ohm,omitzero"`
	FeedbackF        *Number `json:"feedback_f,omitzero"`
	ShuntF           *Number `json:"shunt_f,omitzero"`
	LeadOhm          *Number `json:"lead_ohm,omitzero"`
	LeadF            *Number `json:"lead_f,omitzero"`
	GainBandwidth    *Number `json:"gain_bandwidth_hz,omitzero"`
	OpenLoopGain     *Number `json:"open_loop_gain_ratio,omitzero"`
	Transconductance *Number `json:"transconductance_s,omitzero"`
	OutputOhm        *Number `json:"output_ohm,omitzero"`
}
