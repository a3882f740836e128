package rules

import "strings"

// suffixes of field names and the UCUM code each stands for, longest first.
var suffixes = []struct{ tail, unit string }{
	{"_k_per_w", "K/W"},
	{"_v_per_k", "V/K"},
	{"_a_per_s", "A/s"},
	{"_v_per_s", "V/s"},
	{"_w_per_m3", "W/m3"},
	{"_degc", "Cel"},
	{"_ratio", "1"},
	{"_ohm", "Ohm"},
	{"_deg", "deg"},
	{"_db", "dB"},
	{"_hz", "Hz"},
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
	{"_t", "T"},
	{"_k", "K"},
}

// UnitOf returns the UCUM code that a number's name ends in. The siemens of a
// transconductance share their letter with seconds.
func UnitOf(name string) (string, bool) {
	if strings.HasSuffix(name, "transconductance_s") {
		return "S", true
	}
	for _, s := range suffixes {
		if strings.HasSuffix(name, s.tail) {
			return s.unit, true
		}
	}
	return "", false
}

// unitOfField is UnitOf for the numbers of a stage, with plain counts.
func unitOfField(id string) (string, bool) {
	if strings.HasSuffix(id, "turns") || strings.HasSuffix(id, "count") {
		return "1", true
	}
	return UnitOf(id)
}
