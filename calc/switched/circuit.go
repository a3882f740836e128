// Package switched solves the periodic steady state of a step-down switched
// circuit exactly. It knows resistors, inductors, capacitors, a threshold and
// sources only; what a part does over temperature or bias is decided by its
// callers.
//
// Within one switching interval the circuit is linear, so its state (one current
// per inductor, one voltage per capacitor bank) moves by a matrix exponential.
// The periodic state is the fixed point of the one-period map. Means and RMS
// values are exact integrals of the exponentials, extremes are the true extremes
// inside each interval.
//
// Everything is counted as deviation from a constant reference near the mean, and
// every map as the displacement it causes, so that neither a ripple of millivolts
// on volts nor a slow mode beside a stiff one loses digits.
//
// solve.go is where to start. One phase with one bank has a closed form in the
// plane (plane.go, onebank.go, onerest.go); the rest goes through network.go,
// exponential.go, sequence.go, settle.go and resting.go to the periodic state,
// and through moments.go, measure.go and extremes.go to its figures.
package switched

const (
	MaxPhases = 6 // [1]
	MaxBanks  = 6 // [1]
)

// Bank is a capacitor in series with a resistor.
type Bank struct {
	C   float64 // [F]
	ESR float64 // [ohm] above zero
}

// Admittance returns s C/(1 + s C ESR) [S] at a complex frequency [rad/s].
func (b *Bank) Admittance(s complex128) complex128 {
	y := s * complex(b.C, 0)
	return y / (1 + y*complex(b.ESR, 0))
}

// Rectifier carries the inductor current while the high side is off.
type Rectifier struct {
	Threshold float64 // [V] 0 for a switch
	Slope     float64 // [ohm]
	Blocks    bool    // reverse current is blocked
}

// Leg is what one phase may have of its own.
type Leg struct {
	L         float64 // [H] over the actual current swing
	Winding   float64 // [ohm] winding and switch-node copper
	HighSide  float64 // [ohm]
	Rectifier Rectifier
}

// Circuit is a step-down stage of 1 to 6 interleaved phases, each delayed by one
// Phases-th of the period, into a common output node: capacitor banks, a resistor
// and a constant current.
type Circuit struct {
	Vin         float64         // [V] stiff
	Period      float64         // [s]
	Phases      int             // 1 to MaxPhases
	Leg         Leg             // of every phase
	Legs        *[MaxPhases]Leg // unequal phases; nil: all as Leg
	Banks       int             // 1 to MaxBanks
	Bank        [MaxBanks]Bank
	Conductance float64 // [S] resistive load
	Current     float64 // [A] constant-current load
}

// Mode is the conduction mode.
type Mode uint8

const (
	NoMode        Mode = iota
	Continuous         // the inductor current never rests at zero
	Discontinuous      // it does
	Boundary           // so near to the border of the two that a reader takes it for neither; no solution has it
)

// Status tells how a solution ended.
type Status uint8

const (
	NotRun Status = iota
	Solved
	NotConverged     // no periodic state found within the iteration limit
	NoOperatingPoint // the load drags the output to or below zero
	DropOut          // regulation asks for more than the greatest duty ratio; solved there
	TooShortOnTime   // regulation asks for less than the least duty ratio; solved there
)

// OK reports whether the solution can be used as a regulated or fixed-duty
// steady state.
func (s Status) OK() bool { return s == Solved }

// Branch sums up a current over one period.
type Branch struct {
	Mean float64 // [A]
	RMS  float64 // [A]
}

// LegSolution describes one phase.
type LegSolution struct {
	Mode      Mode
	Conduct   float64 // [1] fraction of the period in which the rectifier conducts
	Inductor  Branch
	HighSide  Branch
	Rectifier Branch
	Peak      float64 // [A] true greatest inductor current
	Valley    float64 // [A] true least
	TurnOn    float64 // [A] inductor current as the high side turns on
	TurnOff   float64 // [A] as it turns off
}

// Solution is a periodic steady state.
type Solution struct {
	Status        Status
	Iterations    int
	Residual      float64                // [1] relative closure of one more period
	Duty          float64                // [1]
	OutputMean    float64                // [V]
	OutputMin     float64                // [V]
	OutputMax     float64                // [V]
	Leg           LegSolution            // phase 0; every phase when all are equal
	Legs          [MaxPhases]LegSolution // each phase of an unequal circuit
	BankRMS       [MaxBanks]float64      // [A]
	BankMean      [MaxBanks]float64      // [V] mean capacitor voltage
	InputMean     float64                // [A] sum over phases of the high-side current
	InputRMS      float64                // [A] of that sum
	EnergyBalance float64                // [1] residual over max(|Pin|, |Pout|, Vin Ihs,rms)
	InputPower    float64                // [W] Vin InputMean
	OutputPower   float64                // [W] mean of output voltage times load current
}
