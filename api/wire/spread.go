package wire

import (
	"fmt"
	"math"
	"strings"

	"railproof/calc/parts"
	"railproof/calc/spread"
)

// distributions by their names in the contract.
var distributions = map[string]spread.Distribution{
	"": spread.Uniform, "uniform": spread.Uniform, "triangular": spread.Triangular, "normal": spread.Normal,
}

// typical returns the value at which everything but statistics works; Unknown
// for a spread that tells none.
func (n *Number) typical() float64 {
	s := n.Spread
	switch {
	case s == nil:
		return n.Value
	case s.Typ != nil:
		return *s.Typ
	case s.Min != nil && s.Max != nil:
		return *s.Min + (*s.Max-*s.Min)/2
	}
	return parts.Unknown
}

// bounds returns the ends of the value.
func (n *Number) bounds() (least, greatest float64) {
	typ, s := n.typical(), n.Spread
	if s == nil {
		return typ, typ
	}
	if s.Tol != nil {
		half := math.Abs(typ) * *s.Tol
		return typ - half, typ + half
	}
	least, greatest = typ, typ
	if s.Min != nil {
		least = *s.Min
	}
	if s.Max != nil {
		greatest = *s.Max
	}
	return least, greatest
}

// faults tells what is contradictory in the spread written at the pointer.
func (n *Number) faults(at string) []Fault {
	s := n.Spread
	if s == nil {
		return nil
	}
	var f []Fault
	bad := func(token, detail string, received float64) {
		f = append(f, Fault{Pointer: at + token, Keyword: "spread", Detail: detail, Received: figure(received), Unit: UnitOf(at + token)})
	}
	typ := n.typical()
	if !parts.Known(typ) {
		bad("", "a spread needs typ, or both min and max", parts.Unknown)
		return f
	}
	if s.Tol != nil {
		switch {
		case s.Min != nil || s.Max != nil:
			bad("/tol", "tol and min or max contradict each other; give one of them", *s.Tol)
		case typ == 0:
			bad("/tol", "a relative tolerance of zero says nothing; give min and max", *s.Tol)
		case strings.HasSuffix(at, "_degc"):
			bad("/tol", "a temperature in degrees Celsius has no relative tolerance; give min and max", *s.Tol)
		}
	}
	if s.Min != nil && !(*s.Min <= typ) {
		bad("/min", fmt.Sprintf("min is above the typical value %g", typ), *s.Min)
	}
	if s.Max != nil && !(*s.Max >= typ) {
		bad("/max", fmt.Sprintf("max is below the typical value %g", typ), *s.Max)
	}
	if s.MatchTol != nil && s.Group == "" {
		bad("/match_tol", "match_tol is the residual of a group's member, and no group is named", *s.MatchTol)
	}
	return f
}

// variable returns the spread as a corner variable; the second result is false
// for a number that has no width.
func (n *Number) variable(at, field string) (spread.Variable, bool) {
	least, greatest := n.bounds()
	s := n.Spread
	if s == nil || (least == greatest && s.MatchTol == nil) {
		return spread.Variable{}, false
	}
	v := spread.Variable{
		Pointer: at, Field: field, Min: least, Typ: n.typical(), Max: greatest,
		Distribution: distributions[s.Distribution], Group: s.Group,
	}
	if s.MatchTol != nil {
		v.MatchTol = *s.MatchTol
	}
	return v, true
}

// groups collects the members of each group to find contradictions.
type groups map[string]groupHead

type groupHead struct {
	pointer      string
	distribution spread.Distribution
}

// join adds a member and returns what contradicts the group.
func (g groups) join(at string, n *Number) []Fault {
	s := n.Spread
	if s == nil || s.Group == "" {
		return nil
	}
	if least, greatest := n.bounds(); least == greatest {
		return []Fault{{Pointer: at + "/group", Keyword: "group", Detail: "a member of a group has a width; this one has none", Received: s.Group}}
	}
	d := distributions[s.Distribution]
	head, found := g[s.Group]
	if !found {
		g[s.Group] = groupHead{at, d}
		return nil
	}
	if head.distribution != d {
		return []Fault{{Pointer: at + "/distribution", Keyword: "group", Detail: "members of a group share one distribution; the first stands at " + head.pointer, Received: nameOf(distributions, d)}}
	}
	return nil
}
