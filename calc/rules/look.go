package rules

import (
	"math"
	"slices"
)

// side tells which end of the model bands a look uses.
type side uint8

const (
	sidePlain side = iota
	sideLow
	sideHigh
)

// Look reads facts by name and remembers what was read, so that the finding can
// name what was missing, extrapolated or uncertain.
type Look struct {
	facts   *facts
	side    side
	missing []string
	beyond  []string
	corners []int
	banded  bool
	by      Search   // the least thorough of what was read
	under   []string // pointers of assumed numbers on which something rests
	assume  string   // the one that lies at an end of its range; "" for none
	end     int      // 0 the low end, 1 the high end
	problem string
}

// Number returns a fact; NaN, and the name remembered, if it is missing.
func (l *Look) Number(name string) float64 {
	f, ok := l.facts.find(name)
	if !ok {
		if !slices.Contains(l.missing, name) {
			l.missing = append(l.missing, name)
		}
		return math.NaN()
	}
	for _, at := range f.beyond {
		if !slices.Contains(l.beyond, at) {
			l.beyond = append(l.beyond, at)
		}
	}
	if f.corners && !slices.Contains(l.corners, f.corner) {
		l.corners = append(l.corners, f.corner)
	}
	l.by = max(l.by, f.by)
	for at := range f.under {
		if !slices.Contains(l.under, at) {
			l.under = append(l.under, at)
		}
	}
	if ends, rests := f.under[l.assume]; rests {
		return ends[l.end]
	}
	if f.banded {
		l.banded = true
		switch l.side {
		case sideLow:
			return f.low
		case sideHigh:
			return f.high
		}
	}
	return f.value
}

// Word returns a word fact; "" counts as missing.
func (l *Look) Word(name string) string {
	w := l.facts.words[name]
	if w == "" && !slices.Contains(l.missing, name) {
		l.missing = append(l.missing, name)
	}
	return w
}

// Flag returns a yes-or-no fact.
func (l *Look) Flag(name string) bool { return l.facts.flags[name] }

// Has reports whether a fact is there, without asking for it.
func (l *Look) Has(name string) bool {
	if _, ok := l.facts.find(name); ok {
		return true
	}
	if _, ok := l.facts.flags[name]; ok {
		return true
	}
	return l.facts.words[name] != ""
}

// Fail records that an expression could not be computed, in words.
func (l *Look) Fail(why string) { l.problem = why }
