package rules

import (
	"strconv"
	"strings"

	"railproof/calc/stage"
)

// Scope names the parts that a rule looks at, one after another.
type Scope uint8

const (
	OverStage Scope = iota
	OverHighSide
	OverLowSide
	OverDiode
	OverInductor
	OverController
	OverOutputCapacitors
	OverInputCapacitors
	ScopeCount
)

// String returns the scope as it stands in a pack.
func (s Scope) String() string {
	return [...]string{"stage", "high_side", "low_side", "diode", "inductor", "controller", "output_capacitors/*", "input_capacitors/*"}[s]
}

// ParseScope returns the scope with a name.
func ParseScope(name string) (Scope, bool) {
	for s := Scope(0); s < ScopeCount; s++ {
		if s.String() == name {
			return s, true
		}
	}
	return 0, false
}

// places returns how many parts of the stage the scope covers.
func (s Scope) places(st *stage.Stage) int {
	diode := st.Rectifier == stage.DiodeRectified
	switch s {
	case OverOutputCapacitors:
		return len(st.OutputCapacitors)
	case OverInputCapacitors:
		return len(st.InputCapacitors)
	case OverLowSide:
		if diode {
			return 0
		}
	case OverDiode:
		if !diode {
			return 0
		}
	}
	return 1
}

// part returns the pointer tail of the scope's place, "" for the stage.
func (s Scope) part(place int) string {
	if s == OverStage {
		return ""
	}
	return strings.Replace(s.String(), "*", strconv.Itoa(place), 1)
}
