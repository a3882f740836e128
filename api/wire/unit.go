package wire

import (
	"strings"

	"railproof/calc/rules"
)

// UnitOf returns the UCUM code of the number a pointer names, or "" if its name
// carries no unit. The ends of a spread have the unit of the value; its relative
// tolerances have none.
func UnitOf(pointer string) string {
	name, parent := lastTokens(pointer)
	switch name {
	case "min", "typ", "max":
		name = parent
	case "tol", "match_tol":
		return "1"
	}
	unit, _ := rules.UnitOf(name)
	return unit
}

func lastTokens(pointer string) (last, before string) {
	i := strings.LastIndexByte(pointer, '/')
	if i < 0 {
		return pointer, ""
	}
	j := strings.LastIndexByte(pointer[:i], '/')
	return pointer[i+1:], pointer[j+1 : i]
}
