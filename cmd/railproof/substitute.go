package main

import "strings"

var substituteCommand = like("buoy-3v3", computation("substitute", "substitutions", "substitutions.json",
	"may these parts replace those of a proven stage?",
	"Puts each replacement part alone into the proven stage and compares: quantities at typical values and\nat worst, findings that change, cautions. Says accepted, rejected or needs-review, with reasons and\nthe data that are missing, and ranks the parts by the weights of the request. The exit code is that of\nthe gravest verdict: 0 if all are accepted, 1 if any is rejected, 4 if any needs review."))

// like lets the help of a command name the example of another rail: that of the first
// is refused on purpose.
func like(rail string, c *command) *command {
	c.example = strings.Replace(c.example, "buoy-5v0", rail, 1)
	return c
}
