package sizing

import (
	"railproof/calc/evaluate"
	"railproof/calc/preferred"
	"railproof/calc/quantity"
	"railproof/calc/spread"
	"railproof/calc/stage"
)

// Status tells how a sizing ended.
type Status uint8

const (
	NotRun Status = iota
	OK
	Infeasible // Conflicts names the fields of the requirement
	StatusCount
)

// String returns the status as it stands on the wire.
func (s Status) String() string { return [...]string{"not-run", "ok", "infeasible"}[s] }

// OK reports whether a draft stage was found.
func (s Status) OK() bool { return s == OK }

// Answer is what sizing says about a requirement. Where the requirement is
// infeasible there is no stage; windows and ratings go as far as they could be
// computed.
type Answer struct {
	Status     Status
	Frequency  float64 // [Hz] switching frequency that it is for
	Conflicts  []Conflict
	Windows    []Window
	Ratings    []Rating
	Divider    Divider
	Checks     []Check
	Worst      evaluate.Status // worst status that Verify met; NotRun before it
	Sweep      []Row           // for a frequency range, in ascending order
	Stage      *stage.Stage
	Spreads    []spread.Variable // tolerances of the stage's values
	Point      stage.Point       // every condition at its typical value
	Conditions stage.Conditions
	Limits     []Limit
	Assumed    []stage.Assumed // fields of the requirement, and after "stage/" of the draft
	Notes      []Note
}

// Window returns the window with a name, of the first bank, or nil.
func (a *Answer) Window(name string) *Window {
	for i := range a.Windows {
		if a.Windows[i].Name == name {
			return &a.Windows[i]
		}
	}
	return nil
}

// Conflict says why no stage can meet the requirement.
type Conflict struct {
	Fields     []string // of the requirement, such as output/voltage_v
	Constraint string
	Needed     float64 // [any] in Unit
	Available  float64 // [any] in Unit
	Unit       string  // UCUM code
	Detail     string
}

// Note is something that the caller should look at.
type Note struct {
	Code   string
	Field  string // of the requirement
	Detail string
}

// Window is the range of values that satisfies every constraint looked at.
type Window struct {
	Name      string // output_capacitance_f and so on
	Bank      int    // capacitor bank that it is for
	Unit      string // UCUM code
	Bounds    []Bound
	Chosen    float64 // [any] of the draft stage, as the circuit sees it at the worse end of tolerance, bias and age
	Preferred float64 // [any] rated value of one piece; NaN where no value is picked
	Count     int     // pieces
	Series    preferred.Series
}

// Least returns the binding lower bound, or nil where there is none.
func (w *Window) Least() *Bound { return w.binding(AtLeast) }

// Most returns the binding upper bound, or nil.
func (w *Window) Most() *Bound { return w.binding(AtMost) }

func (w *Window) binding(side Side) *Bound {
	var b *Bound
	for i := range w.Bounds {
		c := &w.Bounds[i]
		if c.Side != side {
			continue
		}
		if b == nil || (side == AtLeast && c.Value > b.Value) || (side == AtMost && c.Value < b.Value) {
			b = c
		}
	}
	return b
}

// Side tells which end of a window a bound sets.
type Side uint8

const (
	AtLeast Side = iota
	AtMost
)

// Bound is one constraint on a value.
//
// Value is what the circuit must see at the worst corner, every tolerance at its
// worse end. Part is the rated value that a part of the draft stage's kind needs
// for that: Value over Factor. Ideal is the textbook value: no losses, no
// tolerance, nominal frequency, the same constraint.
type Bound struct {
	Side       Side
	Constraint string
	Field      string  // of the requirement
	Value      float64 // [any] in the window's unit
	Part       float64 // [any]
	Factor     float64 // [1] of the rated value that is left by tolerance, current or bias, temperature and age
	Ideal      float64 // [any]
	Corner     Corner
	Formula    string // "L = ...", arithmetic in the symbols of Inputs
	Inputs     []Input
	Source     string
}

// Input is one symbol of a formula.
type Input struct {
	Symbol string
	Value  float64 // [any] in Unit
	Unit   string  // UCUM code
}

// Corner is the condition that decides. NaN: does not matter.
type Corner struct {
	Input     float64 // [V]
	Output    float64 // [V] end of the regulated output's tolerance
	Load      float64 // [A]
	Frequency float64 // [Hz]
	Duty      float64 // [1]
	Hot       bool    // resistances at their greatest; otherwise drops are left out
}

// Rating is a stress that a part of one phase must carry.
type Rating struct {
	Part     string  // role, as in pointers
	Name     string  // voltage_v, peak_a, rms_a, mean_a
	Field    string  // name under the part's rating, "" where data sheets give none
	Applied  float64 // [any] worst stress, without margin
	Required float64 // [any] with the margin that the draft keeps
	Unit     string
	Corner   Corner
	Formula  string
	Inputs   []Input
	Source   string
}

// Divider is the feedback divider and what it makes of the reference.
type Divider struct {
	preferred.Divider
	Reference  float64 // [V]
	WorstError float64 // [1] tolerances of reference and resistors added
	Series     preferred.Series
}

// Limit is a limit on a quantity that follows from a target. NaN: that side is
// free.
type Limit struct {
	Quantity    quantity.ID
	Least, Most float64 // [any] in the quantity's unit
	Target      string  // field of the requirement
	FullLoad    bool    // holds at the greatest load only
}

// Check is a limit as the exact engine found it on the draft stage, over the
// corners of the conditions with every spread at its worse end.
type Check struct {
	Limit
	Worst  float64 // [any] in the quantity's unit
	Met    bool
	Corner stage.Point
}

// Row is one frequency of a sweep.
type Row struct {
	Frequency         float64 // [Hz]
	Status            Status
	Inductance        float64 // [H] rated, one phase
	OutputCapacitance float64 // [F] rated, all pieces
	InputCapacitance  float64 // [F] rated, all pieces
	InductorRipple    float64 // [A] greatest
	OutputRipple      float64 // [V] greatest
	OnTime            float64 // [s] shortest
	OnTimeMargin      float64 // [1] shortest on-time over the controller's least
	Loss              float64 // [W] at typical input and greatest load
	Efficiency        float64 // [1] there
	Chosen            bool
}
