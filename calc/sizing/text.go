package sizing

import "strconv"

// number writes a value for people, three digits.
func number(x float64) string { return strconv.FormatFloat(x, 'g', 3, 64) }
