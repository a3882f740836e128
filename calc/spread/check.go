package spread

import (
	"fmt"
	"math"
)

// check returns everything that contradicts itself in a list of spreads.
func check(variables []Variable) (faults []Fault) {
	first := map[string]*Variable{}
	seen := map[string]bool{}
	for i := range variables {
		v := &variables[i]
		add := func(keyword string, given, limit float64, detail string) {
			faults = append(faults, Fault{v.Pointer, keyword, given, limit, detail})
		}
		if seen[v.Pointer] {
			add("duplicate", v.Typ, v.Typ, "this number carries a spread twice")
		}
		seen[v.Pointer] = true
		if math.IsInf(v.Min, 0) || math.IsInf(v.Max, 0) || !(v.Min <= v.Typ) {
			add("order", v.Min, v.Typ, fmt.Sprintf("min %g is not at or below typ %g", v.Min, v.Typ))
			continue
		}
		if !(v.Typ <= v.Max) {
			add("order", v.Max, v.Typ, fmt.Sprintf("max %g is not at or above typ %g", v.Max, v.Typ))
			continue
		}
		switch {
		case v.Min == v.Max && v.Group != "":
			add("group", v.Max, v.Min, fmt.Sprintf("a member of group %q has no width, so it cannot move with the others; give it a tolerance or take it out of the group", v.Group))
		case v.Min == v.Max:
			add("width", v.Max, v.Min, "min and max are equal: a spread of no width; give a plain number instead")
		}
		if !(v.MatchTol >= 0 && v.MatchTol < 1) {
			add("match_tol", v.MatchTol, 1, "a matching tolerance is at least 0 and below 1")
		} else if v.MatchTol > 0 && v.Group == "" {
			add("match_tol", v.MatchTol, 0, "a matching tolerance needs a group to match")
		}
		if v.Group == "" {
			continue
		}
		if other, ok := first[v.Group]; !ok {
			first[v.Group] = v
		} else if other.Distribution != v.Distribution {
			add("group", float64(v.Distribution), float64(other.Distribution), fmt.Sprintf("group %q has one coordinate, so one distribution: this member says %s, the one at %s says %s", v.Group, v.Distribution, other.Pointer, other.Distribution))
		}
	}
	return faults
}

// String returns the distribution's name on the wire.
func (d Distribution) String() string {
	return [...]string{"uniform", "triangular", "normal"}[d]
}
