package rules

import (
	"railproof/calc/evaluate"
	"railproof/calc/quantity"
	"railproof/calc/spread"
	"railproof/calc/stage"
)

// Search tells how a worst value was looked for.
type Search uint8

const (
	NotSearched    Search = iota // not a worst value
	InBox                        // at vertices, then inside the box
	InBoxSeeded                  // the same, shortened, from the worst points of a like stage
	Vertices                     // at vertices that sensitivities point to, no further
	VerticesSeeded               // the same, shortened, from the worst points of a like stage
)

// String returns the search as it stands on the wire; "" for none.
func (s Search) String() string {
	return [...]string{"", "search", "seeded-search", "vertices", "seeded-vertices"}[s]
}

// Under holds what a value is at both ends of the range of each number that nobody
// gave and on which it rests, by the number's pointer.
type Under map[string][2]float64

// Worst is the extreme value of one quantity and where it was found.
type Worst struct {
	Value  float64  // [any] in the quantity's unit
	Banded bool     // Low and High are given
	Low    float64  // [any] with the loss models at the lower end of their bands
	High   float64  // [any] with the loss models at the upper end of their bands
	By     Search   // how it was found
	Corner int      // the caller's number of the corner
	Beyond []string // pointers of tables used beyond their ends there
	Under  Under
}

// Extreme is the least and the greatest value of one quantity.
type Extreme struct{ Least, Greatest Worst }

// PointStatus is how the evaluation at one corner ended.
type PointStatus struct {
	Status evaluate.Status
	Corner int
}

// Gap is something that the requirement asks for and the case was not made for.
type Gap struct{ Pointer, Detail string }

// Case is all that rules may look at.
type Case struct {
	StageAt       string // pointer of the stage in the request, "/stage"
	Stage         *stage.Stage
	Spreads       []spread.Variable
	Assumed       []stage.Assumed // numbers nobody gave: to a rule they are missing
	RequirementAt string          // pointer of the requirement, "/requirement"
	Requirement   *stage.Requirement
	Nominal       *quantity.Vector // at typical values and conditions
	NominalUses   []string         // pointers of tables used beyond their ends there
	NominalUnder  map[quantity.ID]Under
	Extremes      map[quantity.ID]Extreme
	FullLoad      map[quantity.ID]Extreme  // the same with the load at its greatest
	Absent        map[quantity.ID][]string // of quantities without a value: what their computation lacks
	Uncovered     []Gap
	Statuses      []PointStatus // of every evaluation behind the extremes; one per distinct status is enough
}
