// Package notation reads the values of components as bills of material write
// them: letter-and-digit codes of IEC 60062 (4u7, 2K2, R47, 4K7J) and SI
// notation (4.7 µF 20% 16 V). What can be read in two ways is pointed at, never
// guessed.
package notation

import (
	"fmt"
	"math"
)

// Kind is the kind of component whose value a text gives.
type Kind uint8

const (
	Resistor Kind = iota
	Capacitor
	Inductor
)

// symbol returns the unit of the kind's value as it is written.
func (k Kind) symbol() string { return [...]string{"Ω", "F", "H"}[k] }

// UCUM returns the UCUM code of the unit.
func (k Kind) UCUM() string { return [...]string{"Ohm", "F", "H"}[k] }

// String returns the kind's name.
func (k Kind) String() string { return [...]string{"resistor", "capacitor", "inductor"}[k] }

// Reading is what a text says. A figure that it does not say is NaN.
type Reading struct {
	Value         float64 // in the kind's SI unit
	ToleranceLow  float64 // ratio below the value, 0.2 for -20 %
	ToleranceHigh float64 // ratio above the value
	Voltage       float64 // V, rated
	Current       float64 // A, rated; which rating is not told
	Power         float64 // W, rated
	Dielectric    string  // "X7R", "C0G"; "" if not told
	Package       string  // "0603"; "" if not told
	Doubts        []Problem
	Rest          []string // words that say nothing this package knows
}

// Problem points at the part of a text that cannot be read, or not in one way
// only.
type Problem struct {
	Offset int // bytes from the start of the text
	Text   string
	Detail string
}

// Error says what cannot be read, and where.
func (p *Problem) Error() string {
	return fmt.Sprintf("notation: %q at byte %d: %s", p.Text, p.Offset, p.Detail)
}

// longest bounds a text; nobody writes a value longer than this.
const longest = 300 // bytes

// Read reads one component's text. The error is a *Problem.
func Read(kind Kind, text string) (Reading, error) {
	if len(text) > longest {
		return Reading{}, &Problem{0, text[:20] + "...", fmt.Sprintf("longer than %d bytes", longest)}
	}
	r := reader{kind: kind, text: text, plain: flatten(text)}
	r.Value, r.ToleranceLow, r.ToleranceHigh = math.NaN(), math.NaN(), math.NaN()
	r.Voltage, r.Current, r.Power = math.NaN(), math.NaN(), math.NaN()
	if p := r.read(); p != nil {
		return Reading{}, p
	}
	return r.Reading, nil
}
