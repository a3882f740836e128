package sizing

import (
	"math"
	"strconv"
)

// neat returns x to three digits, as data sheets give values: a placeholder's digits
// beyond would mean nothing.
func neat(x float64) float64 {
	v, err := strconv.ParseFloat(strconv.FormatFloat(x, 'e', 2, 64), 64)
	if err != nil {
		return math.NaN()
	}
	return v
}
