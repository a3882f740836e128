package preferred

import "math"

// AtLeast returns the least value of the series that is not below x. It is NaN
// unless 1e-18 <= x <= 1e18.
func (s Series) AtLeast(x float64) float64 {
	if !usable(x) {
		return math.NaN()
	}
	n := s.indexAtMost(x)
	if v := s.value(n); v >= x*(1-equalWithin) {
		return v
	}
	return s.value(n + 1)
}

// AtMost returns the greatest value of the series that is not above x. It is NaN
// unless 1e-18 <= x <= 1e18.
func (s Series) AtMost(x float64) float64 {
	if !usable(x) {
		return math.NaN()
	}
	return s.value(s.indexAtMost(x))
}

// Nearest returns the value of the series with the least difference from x; of
// two equally near ones the lower. It may lie below x: a computed minimum asks
// for AtLeast. It is NaN unless 1e-18 <= x <= 1e18.
func (s Series) Nearest(x float64) float64 {
	if !usable(x) {
		return math.NaN()
	}
	n := s.indexAtMost(x)
	low, high := s.value(n), s.value(n+1)
	if high-x < x-low {
		return high
	}
	return low
}

// Between returns the values v of the series with least <= v <= greatest,
// ascending, and at most max of them. It is empty where there are none.
func (s Series) Between(least, greatest float64, max int) []float64 {
	values := []float64{}
	if !usable(least) || !usable(greatest) {
		return values
	}
	first, last := s.indexAtMost(least), s.indexAtMost(greatest)
	if s.value(first) < least*(1-equalWithin) {
		first++
	}
	for n := first; n <= last && len(values) < max; n++ {
		values = append(values, s.value(n))
	}
	return values
}

// Contains reports whether x is a value of the series.
func (s Series) Contains(x float64) bool {
	return usable(x) && s.value(s.indexAtMost(x)) >= x*(1-equalWithin)
}
