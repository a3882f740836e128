package stage

// Requirement is what a rail must do.
type Requirement struct {
	Name               string
	Input              Range   // [V]
	SourceResistance   float64 // [ohm]
	Output             float64 // [V]
	OutputTolerance    float64 // [1]
	LoadCurrent        Range   // [A]
	AmbientDegC        Range   // [degC]
	Rectifier          Rectifier
	PhaseCount         int
	SwitchingFrequency Range // [Hz] Min == Max: fixed
	Targets            Targets
}

// Targets are the limits a stage is sized for; parts.Unknown: not asked.
type Targets struct {
	InductorRippleRatio float64 // [1] peak-to-peak ripple over greatest load current, one phase
	OutputRipple        float64 // [V] peak to peak
	InputRipple         float64 // [V] peak to peak
	ContinuousDownTo    float64 // [A] load down to which conduction is continuous
	LoadStep            LoadStep
	HoldUp              HoldUp
	Efficiency          float64 // [1] least, at the greatest load
	JunctionDegC        float64 // [degC] greatest
	Life                float64 // [s] least
}

// LoadStep is a change of load and what the output may do about it.
type LoadStep struct {
	Step      float64 // [A] 0: not asked
	Slew      float64 // [A/s]
	Deviation float64 // [V]
	Recovery  float64 // [s]
}

// HoldUp is the time for which the output must stay above a voltage when the
// input is gone.
type HoldUp struct {
	Time float64 // [s] 0: not asked
	To   float64 // [V]
}
