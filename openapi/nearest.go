package openapi

import (
	"slices"
	"strings"
)

// nearest says which known member an unknown one was probably meant to be, or
// which there are.
func (n *node) nearest(name string) string {
	best, least := "", 1+min(3, len(name)/3)
	for _, known := range n.order {
		d := edits(name, known)
		if strings.HasPrefix(known, name+"_") { // the unit was left out: the shortest such name
			d = len(known) - longest
		}
		if d < least {
			best, least = known, d
		}
	}
	if best != "" {
		return best
	}
	names := slices.Clone(n.order)
	slices.Sort(names)
	return cut("one of "+sentence(names, "or"), 200)
}

// longest bounds the names that edits compares; it exceeds any in the contract.
const longest = 64

// edits returns the Levenshtein distance of two names: how many characters must
// be put in, taken out or changed to make one the other. Names beyond
// longest are as far apart as they are long.
func edits(a, b string) int {
	if len(a) > longest || len(b) > longest {
		return max(len(a), len(b))
	}
	var row [longest + 1]int
	for j := range len(b) + 1 {
		row[j] = j
	}
	for i := range len(a) {
		diagonal := row[0]
		row[0] = i + 1
		for j := range len(b) {
			change := diagonal
			if a[i] != b[j] {
				change++
			}
			diagonal = row[j+1]
			row[j+1] = min(change, row[j]+1, row[j+1]+1)
		}
	}
	return row[len(b)]
}
