package packs

import "fmt"

// dimension is a product of powers of volt, ampere, second, metre, kelvin,
// degree of angle and decibel. Temperatures in degrees Celsius are points on a
// scale, not lengths on it, and keep to themselves.
type dimension struct {
	powers  [7]int8
	celsius bool
	free    bool // a bare number in an expression: takes any dimension it is compared with or added to
	truth   bool // yes or no
	word    bool
}

const (
	volt = iota
	ampere
	second
	metre
	kelvin
	degree
	decibel
)

var symbols = [...]string{"V", "A", "s", "m", "K", "deg", "dB"}

func powers(p map[int]int8) dimension {
	var d dimension
	for i, n := range p {
		d.powers[i] = n
	}
	return d
}

// anyUnit is the unit of a pack's parameter: it takes the dimension of what it is
// used with.
const anyUnit = "any"

// dimensions holds the dimension of every UCUM code that the service uses.
var dimensions = map[string]dimension{
	"1": {}, "V": powers(map[int]int8{volt: 1}), "A": powers(map[int]int8{ampere: 1}),
	"W": powers(map[int]int8{volt: 1, ampere: 1}), "Ohm": powers(map[int]int8{volt: 1, ampere: -1}), "S": powers(map[int]int8{volt: -1, ampere: 1}),
	"s": powers(map[int]int8{second: 1}), "Hz": powers(map[int]int8{second: -1}),
	"H": powers(map[int]int8{volt: 1, second: 1, ampere: -1}), "F": powers(map[int]int8{ampere: 1, second: 1, volt: -1}),
	"C": powers(map[int]int8{ampere: 1, second: 1}), "J": powers(map[int]int8{volt: 1, ampere: 1, second: 1}),
	"T":  powers(map[int]int8{volt: 1, second: 1, metre: -2}),
	"m2": powers(map[int]int8{metre: 2}), "m3": powers(map[int]int8{metre: 3}), "W/m3": powers(map[int]int8{volt: 1, ampere: 1, metre: -3}),
	"K": powers(map[int]int8{kelvin: 1}), "K/W": powers(map[int]int8{kelvin: 1, volt: -1, ampere: -1}), "V/K": powers(map[int]int8{volt: 1, kelvin: -1}),
	"A/s": powers(map[int]int8{ampere: 1, second: -1}), "V/s": powers(map[int]int8{volt: 1, second: -1}),
	anyUnit: {free: true},
	"Cel":   {celsius: true}, "deg": powers(map[int]int8{degree: 1}), "dB": powers(map[int]int8{decibel: 1}),
}

// String names the dimension for a person.
func (d dimension) String() string {
	switch {
	case d.truth:
		return "yes or no"
	case d.word:
		return "a word"
	case d.celsius:
		return "degrees Celsius"
	case d.free:
		return "a bare number"
	}
	for _, unit := range []string{"1", "V", "A", "W", "Ohm", "S", "s", "Hz", "H", "F", "C", "J", "T", "m2", "m3", "W/m3", "K", "K/W", "V/K", "A/s", "V/s", "deg", "dB"} {
		if dimensions[unit] == d {
			if unit == "1" {
				return "a ratio"
			}
			return unit
		}
	}
	text := ""
	for i, n := range d.powers {
		if n != 0 {
			text += fmt.Sprintf("%s^%d ", symbols[i], n)
		}
	}
	return text[:len(text)-1]
}

func (d dimension) number() bool { return !d.truth && !d.word }

// same returns the common dimension of two values that are added or compared.
func same(a, b dimension) (dimension, error) {
	switch {
	case a.free && b.number():
		return b, nil
	case b.free && a.number():
		return a, nil
	case a == b:
		return a, nil
	}
	return a, fmt.Errorf("%s against %s", a, b)
}

// sum returns the dimension of a + b, or a - b.
func sum(a, b dimension, minus bool) (dimension, error) {
	switch {
	case !a.number() || !b.number():
		return a, fmt.Errorf("%s and %s cannot be added", a, b)
	case a.celsius && b.celsius && minus:
		return dimensions["K"], nil
	case a.celsius && b.celsius:
		return a, fmt.Errorf("two temperatures in degrees Celsius cannot be added")
	case a.celsius && (b == dimensions["K"] || b.free):
		return a, nil
	case b.celsius && (a == dimensions["K"] || a.free) && !minus:
		return b, nil
	}
	return same(a, b)
}

// times returns the dimension of a times b to the power of sign (1 or -1).
func times(a, b dimension, sign int8) (dimension, error) {
	if !a.number() || !b.number() {
		return a, fmt.Errorf("%s cannot be multiplied with %s", a, b)
	}
	if a.celsius && b.free {
		return a, nil
	}
	if b.celsius && a.free && sign > 0 {
		return b, nil
	}
	if a.celsius || b.celsius {
		return a, fmt.Errorf("a temperature in degrees Celsius can be multiplied by a bare number only")
	}
	var d dimension
	for i := range d.powers {
		d.powers[i] = a.powers[i] + sign*b.powers[i]
	}
	d.free = a.free && b.free
	return d, nil
}

// root returns the dimension of a square root.
func root(a dimension) (dimension, error) {
	if !a.number() || a.celsius {
		return a, fmt.Errorf("no square root of %s", a)
	}
	d := dimension{free: a.free}
	for i, n := range a.powers {
		if n%2 != 0 {
			return a, fmt.Errorf("no square root of %s", a)
		}
		d.powers[i] = n / 2
	}
	return d, nil
}
