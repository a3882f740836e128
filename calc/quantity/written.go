package quantity

import (
	"fmt"
	"math"
	"strings"
)

// symbols of units in sentences, by UCUM code, where they differ from it.
var symbols = map[string]string{"1": "", "Cel": "°C", "Ohm": "Ω", "deg": "°", "K.m2/W": "K m²/W", "m2": "m²", "m3": "m³"}

// Symbol returns how a UCUM code is written in a sentence.
func Symbol(unit string) string {
	if s, differs := symbols[unit]; differs {
		return s
	}
	return unit
}

// prefixed are the units that take a prefix of the SI.
var prefixed = map[string]bool{"V": true, "A": true, "W": true, "Hz": true, "s": true, "H": true, "F": true, "C": true, "J": true, "T": true, "Ohm": true}

// Parted returns the figures of a value, to four digits, and the symbol that follows
// them: with the prefix that suits them where the unit takes one, and hours for what
// lasts longer than one.
func Parted(x float64, unit string) (figures, symbol string) {
	const names, none, hour = "f p n µ m  k M G T", 5, 3600
	symbol = Symbol(unit)
	switch {
	case !prefixed[unit] || x == 0 || math.IsNaN(x) || math.IsInf(x, 0):
		return fmt.Sprintf("%.4g", x), symbol
	case unit == "s" && math.Abs(x) >= hour:
		return fmt.Sprintf("%.0f", x/hour), "h"
	}
	list := strings.Split(names, " ")
	step := math.Floor(math.Log10(math.Abs(x)) / 3)
	if math.Abs(x)/math.Pow(1000, step) >= 999.95 { // would be written as 1000
		step++
	}
	step = min(max(step, -none), float64(len(list)-1-none))
	if unit == "s" { // nobody counts in kiloseconds
		step = min(step, 0)
	}
	return fmt.Sprintf("%.4g", x/math.Pow(1000, step)), list[int(step)+none] + symbol
}

// Written writes a value for a sentence: 282.5 ns, 45°, 0.92.
func Written(x float64, unit string) string {
	figures, symbol := Parted(x, unit)
	if symbol == "" || unit == "deg" {
		return figures + symbol
	}
	return figures + " " + symbol
}
