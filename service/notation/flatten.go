package notation

import "strings"

// flattener writes look-alike characters in one way. Every replacement keeps the
// length in bytes, so that offsets stay those of the text.
var flattener = strings.NewReplacer(
	"\u03bc", "\u00b5", // Greek mu -> micro sign, two bytes each
	"\u00a0", "  ", // no-break space, two bytes
	"\u202f", "   ", "\u2009", "   ", "\u2007", "   ",
	"\u2126", "\u03a9 ", // ohm sign, three bytes
	"\u2212", "  -", // minus sign, three bytes
	"\t", " ", "\r", " ", "\n", " ",
)

func flatten(text string) string { return flattener.Replace(text) }
