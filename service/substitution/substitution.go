// Package substitution judges replacement parts: what moves when a part of a
// proven stage is replaced, which findings change, and whether the replacement
// can be accepted, must be rejected or needs somebody's review. How a stage is
// assessed is its caller's business; this package compares assessments.
package substitution

import (
	"math"

	"railproof/calc/caution"
	"railproof/calc/quantity"
	"railproof/calc/rules"
)

// Assessment is all that is known about a stage with one set of parts.
type Assessment struct {
	Nominal  quantity.Vector
	Extremes map[quantity.ID]rules.Extreme
	Report   rules.Report
	Cautions []caution.Caution
	Assumed  []string // pointers of numbers that nobody gave
}

// Candidate is one replacement part with the assessment of the stage that has it.
type Candidate struct {
	ID      string
	Role    string      // pointer of the part that is replaced, "/stage/inductor"
	Missing []string    // pointers of numbers without which nothing can be assessed
	After   *Assessment // nil if nothing could be assessed
	Failure string      // why nothing could be assessed, if not for missing numbers
	Cost    float64     // in the caller's currency; NaN if not given
	Area    float64     // m2; NaN if not given
}

// Verdict is what becomes of a candidate. The zero value accepts nothing.
type Verdict uint8

const (
	NeedsReview Verdict = iota
	Accepted
	Rejected
)

// String returns the verdict as it stands on the wire.
func (v Verdict) String() string { return [...]string{"needs-review", "accepted", "rejected"}[v] }

// Reason is one reason for a verdict.
type Reason struct {
	Code    string // one of the Reason constants
	Rule    string // of a finding
	Pointer string
	Detail  string
}

// Move is one quantity before and after, at typical values and at worst.
type Move struct {
	Quantity                      quantity.ID
	NominalBefore, NominalAfter   float64
	LeastBefore, LeastAfter       float64
	GreatestBefore, GreatestAfter float64
	Min, Max                      float64 // limits; NaN for none
}

// Worst returns the extreme value that matters: the least where only a lower
// limit is set, else the greatest.
func (m *Move) Worst() (before, after float64) {
	if !math.IsNaN(m.Min) && math.IsNaN(m.Max) {
		return m.LeastBefore, m.LeastAfter
	}
	return m.GreatestBefore, m.GreatestAfter
}

// Outcome is what is known and decided about one candidate.
type Outcome struct {
	ID       string
	Role     string
	Verdict  Verdict
	Reasons  []Reason
	Missing  []string
	Moves    []Move
	Changes  []rules.Change // findings that appear, disappear or change
	Cautions []caution.Caution
	Score    float64 // weighted, lower is better; NaN if not known
	Rank     int     // from 1 for the best; 0 before Rank has compared it with others
	Terms    Terms
}

// moved is the relative change below which a quantity counts as unmoved.
const moved = 1e-6

// Judge compares a candidate with the stage as it was proven.
func Judge(before *Assessment, c *Candidate, limits []rules.Limit) Outcome {
	o := Outcome{ID: c.ID, Role: c.Role, Score: math.NaN(), Terms: unknownTerms()}
	if c.After == nil {
		o.Missing = c.Missing
		if len(c.Missing) > 0 {
			o.reason(ReasonMissing, "", c.Role, "the part's data lack what every computation needs")
		}
		if c.Failure != "" {
			o.reason(ReasonFailure, "", c.Role, c.Failure)
		}
		return o
	}
	o.Moves = moves(before, c.After, limits)
	o.Cautions = newCautions(before.Cautions, c.After.Cautions)
	for _, change := range rules.Compare(before.Report.Findings, c.After.Report.Findings) {
		if change.Kind != rules.Unchanged {
			o.Changes = append(o.Changes, change)
		}
		o.weigh(change, c.Role)
	}
	o.weighCautions()
	o.weighAssumptions(before, c)
	o.settle(c.After)
	return o
}

func (o *Outcome) reason(code, rule, pointer, detail string) {
	o.Reasons = append(o.Reasons, Reason{code, rule, pointer, detail})
}

// moves lists the quantities that differ, in the order of the table.
func moves(before, after *Assessment, limits []rules.Limit) []Move {
	var list []Move
	none := math.NaN()
	for id := quantity.ID(0); id < quantity.Count; id++ {
		m := Move{id, before.Nominal[id], after.Nominal[id], none, none, none, none, none, none}
		if e, ok := before.Extremes[id]; ok {
			m.LeastBefore, m.GreatestBefore = e.Least.Value, e.Greatest.Value
		}
		if e, ok := after.Extremes[id]; ok {
			m.LeastAfter, m.GreatestAfter = e.Least.Value, e.Greatest.Value
		}
		if !differ(m.NominalBefore, m.NominalAfter) && !differ(m.LeastBefore, m.LeastAfter) && !differ(m.GreatestBefore, m.GreatestAfter) {
			continue
		}
		for _, l := range limits {
			if l.Quantity == id && l.Where == rules.AtWorst {
				m.Min, m.Max = l.Min, l.Max
			}
		}
		list = append(list, m)
	}
	return list
}

func differ(a, b float64) bool {
	if math.IsNaN(a) || math.IsNaN(b) {
		return math.IsNaN(a) != math.IsNaN(b)
	}
	return math.Abs(a-b) > moved*math.Max(math.Abs(a), math.Abs(b))
}

// newCautions returns the cautions that were not there, or whose stress has grown.
func newCautions(before, after []caution.Caution) []caution.Caution {
	var list []caution.Caution
	for _, a := range after {
		known := false
		for _, b := range before {
			if b.Code == a.Code && b.Pointer == a.Pointer && !(a.Value > b.Value*(1+moved)) {
				known = true
			}
		}
		if !known {
			list = append(list, a)
		}
	}
	return list
}
