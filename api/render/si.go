package render

import (
	"math"
	"strconv"
	"strings"
)

// prefixes of the SI from 1e-15 to 1e12.
var prefixes = []string{"f", "p", "n", "µ", "m", "", "k", "M", "G", "T"}

const basePrefix = 5 // index of no prefix

// units for people, by UCUM code; those of one symbol take a prefix.
var peopleUnits = map[string]struct {
	symbol   string
	prefixed bool
}{
	"V": {"V", true}, "A": {"A", true}, "W": {"W", true}, "Hz": {"Hz", true}, "s": {"s", true}, "H": {"H", true}, "F": {"F", true},
	"C": {"C", true}, "J": {"J", true}, "T": {"T", true}, "S": {"S", true}, "Ohm": {"Ω", true}, "W/m3": {"W/m³", true}, "V/s": {"V/s", true}, "A/s": {"A/s", true},
	"Cel": {"°C", false}, "K": {"K", false}, "K/W": {"K/W", false}, "V/K": {"V/K", false}, "deg": {"°", false}, "dB": {"dB", false},
	"m2": {"m²", false}, "m3": {"m³", false}, "1": {"", false}, "": {"", false},
}

// smallUnits of areas and volumes, whose prefixes are raised with the metre.
var smallUnits = map[string][]struct {
	symbol string
	size   float64
}{
	"m2": {{"mm²", 1e-6}, {"cm²", 1e-4}},
	"m3": {{"mm³", 1e-9}, {"cm³", 1e-6}},
}

// Figure3 writes a number with three significant digits and its unit, prefixed
// as people write it: 6.58 µH. Times above an hour are written in hours.
func Figure3(v float64, unit string) string {
	switch {
	case math.IsNaN(v):
		return "-"
	case math.IsInf(v, 0):
		return strings.ReplaceAll(strconv.FormatFloat(v, 'g', 3, 64), "Inf", "∞")
	case unit == "s" && math.Abs(v) >= 3600:
		return Figure3(v/3600, "") + " h"
	}
	for _, small := range smallUnits[unit] {
		if v != 0 && math.Abs(v) < 999.5*small.size {
			return three(v/small.size) + " " + small.symbol
		}
	}
	u, known := peopleUnits[unit]
	if !known {
		u.symbol = unit
	}
	if unit == "deg" { // the one unit that stands close
		return three(v) + u.symbol
	}
	if !u.prefixed {
		return strings.TrimSpace(three(v) + " " + u.symbol)
	}
	if v == 0 {
		return "0 " + u.symbol
	}
	exponent := int(math.Floor(math.Log10(math.Abs(v)) / 3))
	if math.Abs(v)/math.Pow10(3*exponent) >= 999.5 { // would round to four digits
		exponent++
	}
	i := min(max(exponent+basePrefix, 0), len(prefixes)-1)
	return three(v/math.Pow10(3*(i-basePrefix))) + " " + prefixes[i] + u.symbol
}

// three writes three significant digits without an exponent where that is short,
// and a whole number with all of its digits.
func three(v float64) string {
	a := math.Abs(v)
	switch {
	case v == 0:
		return "0"
	case a >= 1e7 || a < 1e-4:
		return strconv.FormatFloat(v, 'e', 2, 64)
	}
	rounded := strconv.FormatFloat(a, 'e', 2, 64)
	exponent, err := strconv.Atoi(rounded[strings.IndexByte(rounded, 'e')+1:])
	if err != nil {
		panic("render: a number without an exponent: " + rounded)
	}
	return strconv.FormatFloat(v, 'f', max(0, 2-exponent), 64)
}

// percent writes a ratio as people do.
func percent(ratio float64) string { return three(100*ratio) + " %" }
