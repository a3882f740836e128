package main

import "regexp"

// Select Graphic Rendition of ECMA-48.
const (
	green  = "\x1b[32m"
	yellow = "\x1b[33m"
	red    = "\x1b[31m"
	plain  = "\x1b[0m"
)

// verdicts are the words of a table that are told by colour too; the words alone say
// it all.
var verdicts = []struct {
	words  *regexp.Regexp
	colour string
}{
	{regexp.MustCompile(`(^|\s)(ok|pass|passes|accepted|agrees)(\s|[,.;:]|$)`), green},
	{regexp.MustCompile(`(^|\s)(not-converged|not-run|not-evaluated|incomplete|needs-review|warning|waived)(\s|[,.;:]|$)`), yellow},
	{regexp.MustCompile(`(^|\s)(fail|fails|error|rejected|disagrees|infeasible|runaway|over-temperature|drop-out|too-short-on-time|no-operating-point)(\s|[,.;:]|$)`), red},
}

// noColour is set, to anything, by those who want no colours.
const noColour = "NO_COLOR" //nolint:misspell // its name everywhere

// takesColour reports whether standard output shows colours and nobody has said that
// there should be none.
func takesColour(t terminal) bool {
	return isTerminal(t.out) && t.env(noColour) == "" && t.env("TERM") != "dumb"
}

// coloured marks the verdicts of a table.
func coloured(text []byte) []byte {
	for _, v := range verdicts {
		text = v.words.ReplaceAll(text, []byte("${1}"+v.colour+"${2}"+plain+"${3}"))
	}
	return text
}
