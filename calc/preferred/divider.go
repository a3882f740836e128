package preferred

import "math"

// Divider is a pair of resistors that sets an output voltage from a reference.
type Divider struct {
	Upper  float64 // [ohm] from the output to the feedback node
	Lower  float64 // [ohm] from there to ground
	Output float64 // [V] at which the feedback node stands at the reference
	Error  float64 // [1] Output over the voltage asked for, minus one
}

// NewDivider returns the pair of preferred values that sets an output voltage
// with the least error, the lower resistor lying within half a decade on either
// side of a wished value.
//
//	Vout = Vref · (1 + Rupper/Rlower)
//
//	reference [V]   at the feedback node
//	output    [V]   asked for, at least the reference
//	lower     [ohm] wished value of the lower resistor
//
// Of pairs with equal error the one whose lower resistor is nearest to the wish,
// as a ratio, is taken. An output equal to the reference gives an upper resistor
// of zero. ok is false when output < reference, which no divider can set, or
// where a value is not positive.
//
// Source: voltage divider without load; the search is exhaustive.
// Checked by TestDividerIsTheBestOfAllPairs.
func (s Series) NewDivider(reference, output, lower float64) (d Divider, ok bool) {
	if !(usable(reference) && usable(output) && usable(lower)) || output < reference*(1-equalWithin) {
		return Divider{}, false
	}
	halfDecade := math.Sqrt(10)
	ratio := output/reference - 1
	if ratio <= equalWithin {
		return Divider{Lower: s.Nearest(lower), Output: reference, Error: reference/output - 1}, true
	}
	bestError, bestReach := math.Inf(1), math.Inf(1)
	for _, low := range s.Between(lower/halfDecade, lower*halfDecade, int(s)+1) {
		for _, up := range [2]float64{s.AtMost(ratio * low), s.AtLeast(ratio * low)} {
			v := reference * (1 + up/low)
			e := v/output - 1
			reach := math.Abs(math.Log(low / lower))
			// A difference below rounding is no reason to prefer a pair.
			if better := math.Abs(e) < bestError-equalWithin; better || math.Abs(e) <= bestError+equalWithin && reach < bestReach {
				bestError, bestReach = math.Abs(e), reach
				d = Divider{Upper: up, Lower: low, Output: v, Error: e}
			}
		}
	}
	return d, true
}
