// Package bom compares bills of material with stages that were proven: for every
// line that is bound to a part of a rail, do value, tolerance, rating and
// quantity agree with what the proof rests on?
package bom

import (
	"fmt"
	"strconv"
	"strings"
)

// Bounds of one bill of material.
const (
	MaxLines       = 20000    // [1]
	MaxBytes       = 16 << 20 // [1] of a CSV text
	maxDesignators = 2000     // [1] on one line
	maxCell        = 4096     // [1] bytes
)

// Line is one line of a bill of material.
type Line struct {
	Row         int // line of the CSV text, or position in the JSON list counted from 1
	Designators []string
	Value       string
	Tolerance   string // empty where the value's text has it
	Rating      string // rated voltage or current; empty where the value's text has it
	PartNumber  string
	Count       float64 // pieces that the line states; NaN if it does not
	NotFitted   bool
}

// Designators reads a list of reference designators such as "C1, C4-C7". A range
// needs the same letters at both ends, or none at the second.
func Designators(text string) ([]string, error) {
	var list []string
	for _, item := range strings.FieldsFunc(text, func(r rune) bool { return strings.ContainsRune(",; \t\r\n\u00a0", r) }) {
		from, to, isRange := strings.Cut(item, "-")
		if !isRange {
			list = append(list, from)
			continue
		}
		prefix, first, ok := split(from)
		prefixTo, last, okTo := split(to)
		if !ok || !okTo || prefixTo != "" && prefixTo != prefix || last < first {
			return nil, fmt.Errorf("%.40q is not a range of designators", item)
		}
		if last-first >= maxDesignators {
			return nil, fmt.Errorf("%.40q has more than %d designators", item, maxDesignators)
		}
		for n := first; n <= last; n++ {
			list = append(list, prefix+strconv.Itoa(n))
		}
	}
	if len(list) > maxDesignators {
		return nil, fmt.Errorf("more than %d designators", maxDesignators)
	}
	return list, nil
}

// Range is a run of designators that belongs to a rail, such as C300 to C349.
type Range struct {
	Prefix      string
	First, Last int
}

// ParseRange reads the first and the last designator of a range.
func ParseRange(from, to string) (Range, error) {
	prefix, first, ok := split(from)
	prefixTo, last, okTo := split(to)
	if !ok || !okTo || prefix != prefixTo || last < first {
		return Range{}, fmt.Errorf("%.20q to %.20q is not a range of designators", from, to)
	}
	return Range{prefix, first, last}, nil
}

// covers reports whether a designator lies in the range.
func (g Range) covers(designator string) bool {
	prefix, n, ok := split(designator)
	return ok && prefix == g.Prefix && n >= g.First && n <= g.Last
}

// split parts a designator into its letters and its number.
func split(designator string) (prefix string, number int, ok bool) {
	i := len(designator)
	for i > 0 && designator[i-1] >= '0' && designator[i-1] <= '9' {
		i--
	}
	if i == len(designator) || len(designator)-i > 9 {
		return "", 0, false
	}
	number, err := strconv.Atoi(designator[i:])
	return designator[:i], number, err == nil
}
