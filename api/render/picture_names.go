package render

import (
	"slices"
	"strconv"
	"strings"

	"railproof/calc/quantity"
)

// spoken writes a name of the contract for reading: output_capacitors/0 is output
// capacitors, bank 0.
func spoken(s string) string {
	name, bank, found := strings.Cut(s, "/")
	name = strings.ReplaceAll(name, "_", " ")
	if found {
		name += ", bank " + bank
	}
	return name
}

// endings of names that tell the unit, the longest first.
var endings = []string{"_w_per_m3", "_ratio", "_degc", "_deg", "_ohm", "_hz", "_db", "_v", "_a", "_w", "_s", "_h", "_f", "_t"}

// quantityName writes a quantity's key for reading, without its unit.
func quantityName(key string) string {
	name, bank, found := strings.Cut(key, "/")
	if i := slices.IndexFunc(endings, func(e string) bool { return strings.HasSuffix(name, e) }); i >= 0 {
		name = strings.TrimSuffix(name, endings[i])
	}
	name = spoken(name)
	for _, r := range [][2]string{{" pp", ", peak to peak"}, {"rms", "RMS"}, {"esl", "ESL"}, {"esr", "ESR"}, {"junction", "junction temperature"}, {"winding", "winding temperature"}} {
		name = strings.ReplaceAll(name, r[0], r[1])
	}
	if found {
		name += ", bank " + bank
	}
	return name
}

// quantityForPeople returns a quantity's name for reading, the unit to show and
// the factor to it: efficiencies are shown in per cent, lives in hours.
func quantityForPeople(key string) (name, unit string, factor float64) {
	unit = unitOfKey(key)
	if bank, _, _ := strings.Cut(key, "/"); strings.HasSuffix(bank, "_life_s") {
		return quantityName(key), "h", 1.0 / 3600
	}
	if id, found := quantity.ByKey(key); found && (id == quantity.Efficiency || id == quantity.OutputError) {
		return quantityName(key), "%", 100
	}
	return quantityName(key), unit, 1
}

// countOf writes a number of things.
func countOf(n int, one, more string) string {
	if n == 1 {
		return "1 " + one
	}
	return strconv.Itoa(n) + " " + more
}

func nameOr(name, otherwise string) string {
	if name == "" {
		return otherwise
	}
	return name
}
