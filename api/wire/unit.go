package wire

import "strings"

// unitOfSuffix maps the suffix of a number's name to the UCUM code of its unit;
// longer suffixes stand before those they end in.
var unitOfSuffix = []struct{ suffix, unit string }{
	{"_k_per_w", "K/W"},
	{"_v_per_k", "V/K"},
	{"_a_per_s", "A/s"},
	{"_v_per_s", "V/s"},
	{"_w_per_m3", "W/m3"},
	{"_degc", "Cel"},
	{"_ohm", "Ohm"},
	{"_ratio", "1"},
	{"_deg", "deg"},
	{"_hz", "Hz"},
	{"_db", "dB"},
	{"_m2", "m2"},
	{"_m3", "m3"},
	{"_v", "V"},
	{"_a", "A"},
	{"_w", "W"},
	{"_s", "s"},
	{"_h", "H"},
	{"_f", "F"},
	{"_c", "C"},
	{"_j", "J"},
	{"_k", "K"},
	{"_t", "T"},
}

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
	for _, s := range unitOfSuffix {
		if strings.HasSuffix(name, s.suffix) {
			if name == "transconductance_s" {
				return "S"
			}
			return s.unit
		}
	}
	return ""
}

func lastTokens(pointer string) (last, before string) {
	i := strings.LastIndexByte(pointer, '/')
	if i < 0 {
		return pointer, ""
	}
	j := strings.LastIndexByte(pointer[:i], '/')
	return pointer[i+1:], pointer[j+1 : i]
}
