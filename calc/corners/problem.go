package corners

import (
	"math"

	"railproof/calc/evaluate"
	"railproof/calc/spread"
	"railproof/calc/switched"
)

// Model evaluates a design. It belongs to one worker and does not allocate.
type Model interface {
	// Eval sets out to the quantities at coordinates z; NaN where one has no value.
	// Both slices keep the lengths of the problem.
	Eval(z, out []float64) (evaluate.Status, switched.Mode)
}

// Kind is what a coordinate stands for.
type Kind uint8

const (
	Random    Kind = iota // a tolerance: differs from unit to unit
	Bias                  // a drift of known sign: the same in every unit
	Condition             // a range of operation
)

// Coordinate is one direction of the box, typical at 0.
type Coordinate struct {
	Kind      Kind
	Low, High float64        // [1] ends, Low <= 0 <= High and Low < High; -1 and 1, or 0 on a side without width
	Moments   spread.Moments // of a Random coordinate
	Levels    []float64      // [1] further places worth trying, such as a known stationary point
}

// Direction is the side on which a quantity is at its worst.
type Direction uint8

const (
	Greatest Direction = iota
	Least
)

// Target is a quantity whose worst value is sought.
type Target struct {
	Quantity  int // index in a Model's out
	Direction Direction
	// Monotonic, if given, holds for every coordinate the sign of the quantity's
	// change over the whole box, as shown by analysis of its formula.
	Monotonic []int8
}

// Problem is the box and what is asked about it.
type Problem struct {
	Coordinates []Coordinate
	Quantities  int // length of a Model's out
	Targets     []Target
	Seed        uint64
}

// score orders values of a target: greater is worse for the design; a value that
// does not exist is below all others.
func (t *Target) score(v float64) float64 {
	switch {
	case math.IsNaN(v):
		return math.Inf(-1)
	case t.Direction == Least:
		return -v
	}
	return v
}

// Work is a set of numbered tasks without an order among them.
type Work interface {
	Tasks() int
	// Run does one task with the model of the given worker. Each worker runs one
	// task at a time.
	Run(task, worker int, m Model)
}

// Job is a computation that goes on in steps: all tasks of the Work that Next
// returns must have run before Next is called again. It returns nil at the end.
type Job interface {
	Next() Work
}

// Run does a whole job with one model, on the caller's goroutine.
func Run(j Job, m Model) {
	for w := j.Next(); w != nil; w = j.Next() {
		for t := range w.Tasks() {
			w.Run(t, 0, m)
		}
	}
}
