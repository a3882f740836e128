package parts

// Modulator turns the control voltage into a duty ratio.
type Modulator struct {
	Present       bool
	Mode          ModulatorMode
	Ramp          float64 // [V] peak-to-peak of the voltage-mode ramp; with feed-forward, at FeedForwardAt
	FeedForward   bool    // the ramp is proportional to the input voltage
	FeedForwardAt float64 // [V] input voltage at which Ramp holds
	Sense         float64 // [ohm] current sense gain, volts at the comparator per ampere
	Slope         float64 // [V/s] slope compensation at the comparator
	Delay         float64 // [s] comparator and driver delay
	CurrentLimit  float64 // [A] peak inductor current of one phase, cycle by cycle
}

// ModulatorMode tells what the duty ratio is compared against.
type ModulatorMode uint8

const (
	VoltageMode ModulatorMode = iota
	PeakCurrentMode
)

// Compensator is the error amplifier with its network. Symbols in brackets are
// those of the usual texts; the upper feedback resistor is R1.
type Compensator struct {
	Present          bool
	Type             CompensatorType
	FeedbackOhm      float64 // [ohm] R2, or Rz of a transconductance amplifier
	FeedbackF        float64 // [F] C1 in series with it, or Cz
	ShuntF           float64 // [F] C2 across both, or Cp; 0 for none
	LeadOhm          float64 // [ohm] R3 in series with the lead capacitor
	LeadF            float64 // [F] C3 across the upper resistor; 0 for none
	GainBandwidth    float64 // [Hz] op-amp unity-gain frequency; Unknown: ideal
	OpenLoopGain     float64 // [1] op-amp direct gain; Unknown: ideal
	Transconductance float64 // [S]
	OutputOhm        float64 // [ohm] of the transconductance amplifier; Unknown: infinite
}

// CompensatorType names the amplifier and the order of its network.
type CompensatorType uint8

const (
	OpAmpType1 CompensatorType = iota
	OpAmpType2
	OpAmpType3
	TransconductanceType2
	TransconductanceType3
)
