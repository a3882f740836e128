package rules

import (
	"math"

	"railproof/calc/parts"
)

// Verdict is what a rule says about one place. The zero value says that nothing
// was found out.
type Verdict uint8

const (
	NotEvaluated Verdict = iota
	Pass
	Fail
	Waived
)

// String returns the verdict as it stands on the wire.
func (v Verdict) String() string { return [...]string{"not-evaluated", "pass", "fail", "waived"}[v] }

// Overall is the verdict of a whole check.
type Overall uint8

const (
	Incomplete Overall = iota
	Passed
	Failed
)

// String returns the overall verdict as it stands on the wire.
func (o Overall) String() string { return [...]string{"incomplete", "pass", "fail"}[o] }

// Finding is one rule's verdict about one place.
type Finding struct {
	Rule       string
	Title      string
	Severity   Severity
	Pointer    string
	Relation   Relation
	Value      float64 // [any] in Unit; NaN if unknown
	Limit      float64 // [any] in Unit; NaN if unknown
	Unit       string
	Margin     float64 // [1] left to the limit, in terms of the limit; negative beyond it; NaN if unknown
	ValueLow   float64 // [any] least value within the model bands; NaN without bands
	ValueHigh  float64 // [any] greatest value within the model bands; NaN without bands
	WithinBand bool    // the margin is smaller than the model band: the verdict could turn
	Corners    []int   // the caller's numbers of the corners at which the values are worst
	WorstBy    Search  // how these were looked for
	ByKind     bool    // the rule applies to some kinds of part only
	Verdict    Verdict
	WaivedFrom Verdict // what the verdict was before a waiver
	Waiver     *Waiver
	Missing    []string // names of facts that nobody gave
	Beyond     []string // pointers of tables that were used beyond their ends
	Detail     string
	Basis      string // where the limit stands
	Pack       string
	Edition    string
	Provenance string // of the pack
	Origin     string // the rule of another pack that this one was derived from
}

func blank() Finding {
	return Finding{Value: parts.Unknown, Limit: parts.Unknown, Margin: parts.Unknown, ValueLow: parts.Unknown, ValueHigh: parts.Unknown}
}

// rounding is the relative excess at which a value still counts as equal to its
// limit: a stress ratio of exactly 0.8 must not fail for the last bit of a
// division.
const rounding = 1e-9 // [1]

// meets reports whether a value keeps to its limit.
func meets(r Relation, value, limit float64) bool {
	slack := rounding * math.Abs(limit)
	if r == AtLeast {
		return value >= limit-slack
	}
	return value <= limit+slack
}

// margin returns what is left to the limit as a fraction of it, positive on the
// good side. Temperatures count from the 25 degC at which data sheets rate.
func margin(r Relation, value, limit float64, unit string) float64 {
	if unit == "Cel" {
		value, limit = value-parts.ReferenceDegC, limit-parts.ReferenceDegC
	}
	left := limit - value
	if r == AtLeast {
		left = -left
	}
	if limit == 0 {
		return parts.Unknown
	}
	return left / math.Abs(limit)
}
