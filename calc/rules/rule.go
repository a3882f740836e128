// Package rules decides whether a stage meets design rules, on the worst values
// that a corner analysis found. A rule compares a value with a limit at one
// place of the stage; a missing or extrapolated figure makes it not-evaluated,
// never passed.
//
// How a rule's condition, value and limit are written is not this package's
// business: it takes them as functions that look facts up by name, so that every
// use of a fact is seen and a missing one can be named.
package rules

// Severity tells what a finding decides.
type Severity uint8

const (
	Error   Severity = iota // a failure fails the check, a gap makes it incomplete
	Warning                 // a failure fails the check
	Note                    // decides nothing
)

// String returns the severity as it stands on the wire.
func (s Severity) String() string { return [...]string{"error", "warning", "note"}[s] }

// Relation tells on which side of its limit a value may lie.
type Relation uint8

const (
	AtMost Relation = iota
	AtLeast
)

// String returns the relation as it stands on the wire.
func (r Relation) String() string { return [...]string{"at-most", "at-least"}[r] }

// Number computes one figure of a rule from facts; NaN where one is missing.
type Number func(*Look) float64

// Predicate decides from facts whether a rule applies.
type Predicate func(*Look) bool

// Body is a rule made ready for one scope.
type Body struct {
	Scope Scope
	When  Predicate // nil: always
	Value Number
	Limit Number
	Reads []string // names of the facts that value and limit may look up

	ByKind bool // whether it applies depends on the kind of part
}

// Rule compares a value with a limit.
type Rule struct {
	ID       string // pack and rule: "general-practice/inductor-heating"
	Title    string
	Severity Severity
	Relation Relation
	Unit     string // UCUM code of value and limit
	At       string // pointer of the finding below its part, "rating/voltage_v"; "" for the part itself
	Pointer  string // whole pointer of the finding, where it is not about a part; "" to use At
	Needs    []string
	Message  Message
	Basis    string // where the limit stands, or that it is common practice
	Origin   string // the rule of another pack that this one was derived from; "" for none
	Bodies   []Body
}

// Pack is a set of rules with a name and an origin.
type Pack struct {
	ID         string
	Title      string
	Edition    string
	Provenance string
	Rules      []Rule
	Parameters map[string]float64 // [any] constants that the pack's expressions may use
	Overrides  []Override
}

// Override is what a derived pack changed in the pack it extends.
type Override struct {
	Pack   string // the pack that changes
	Target string // rule "general-practice/inductor-heating" or parameter "quality_level"
	What   string // "limit", "severity", "enabled", "parameter"
	From   string
	To     string
	Reason string
}
