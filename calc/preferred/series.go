// Package preferred holds the preferred number series of IEC 60063 and picks
// values and resistive dividers from them.
//
// A computed value and a preferred one are taken as equal when they differ by
// less than one part in 1e9, so that 4.7e-6 that came out of arithmetic as
// 4.7000000000000005e-6 is still the preferred 4.7e-6.
//
// Source: IEC 60063, Preferred number series for resistors and capacitors.
package preferred

import "math"

// Series is one of the series, named by its number of values per decade.
type Series uint8

const (
	E3   Series = 3
	E6   Series = 6
	E12  Series = 12
	E24  Series = 24
	E48  Series = 48
	E96  Series = 96
	E192 Series = 192
)

// All lists the series, coarsest first.
func All() []Series { return []Series{E3, E6, E12, E24, E48, E96, E192} }

// equalWithin is the relative difference below which two values count as one.
// It lies far above the rounding of a few operations (1e-16 each) and far below
// the finest step of a series (1.2 %).
const equalWithin = 1e-9 // [1]

// e24 is a list, not a formula: eight of its values differ from 10^(i/24)
// rounded to two digits. E12, E6 and E3 are every second, fourth and eighth.
var e24 = [24]int{10, 11, 12, 13, 15, 16, 18, 20, 22, 24, 27, 30, 33, 36, 39, 43, 47, 51, 56, 62, 68, 75, 82, 91}

// e192 is 100*10^(i/192) rounded to three digits, but for one value: place 185
// would round to 919 and stands as 920. E96 and E48 are every second and fourth.
var e192 = func() (m [192]int) {
	for i := range m {
		m[i] = int(math.Round(100 * math.Pow(10, float64(i)/192)))
	}
	m[185] = 920
	return m
}()

// String returns the usual name, such as "E96"; it is empty for no series.
func (s Series) String() string {
	switch s {
	case E3:
		return "E3"
	case E6:
		return "E6"
	case E12:
		return "E12"
	case E24:
		return "E24"
	case E48:
		return "E48"
	case E96:
		return "E96"
	case E192:
		return "E192"
	}
	return ""
}

// ByName returns the series with a name such as "E96".
func ByName(name string) (Series, bool) {
	for _, s := range All() {
		if s.String() == name {
			return s, true
		}
	}
	return 0, false
}

// mantissa returns the i-th value of the decade from 100 to 999, in hundredths
// of the decade's first value.
func (s Series) mantissa(i int) int {
	if s <= E24 {
		return 10 * e24[i*(24/int(s))]
	}
	return e192[i*(192/int(s))]
}

// Mantissas returns the values of the decade from 1 up to 10, ascending.
func (s Series) Mantissas() []float64 {
	m := make([]float64, s)
	for i := range m {
		m[i] = scaled(s.mantissa(i), -2)
	}
	return m
}

// scaled returns m * 10^e, correctly rounded for every value between 1e-20 and
// 1e20: both factors are exact there, so one rounding remains and the result is
// the very number that a decimal literal of the same value denotes.
func scaled(m, e int) float64 {
	if e < 0 {
		return float64(m) / math.Pow10(-e)
	}
	return float64(m) * math.Pow10(e)
}

// value returns the n-th value of the whole series; n = 0 is 1.
func (s Series) value(n int) float64 {
	decade := n / int(s)
	i := n % int(s)
	if i < 0 {
		i += int(s)
		decade--
	}
	return scaled(s.mantissa(i), decade-2)
}

// indexAtMost returns the n of the greatest value that does not exceed x.
func (s Series) indexAtMost(x float64) int {
	n := int(math.Floor(math.Log10(x) * float64(s)))
	// The logarithm is off by at most one place of a listed (not computed) series.
	for s.value(n+1) <= x*(1+equalWithin) {
		n++
	}
	for s.value(n) > x*(1+equalWithin) {
		n--
	}
	return n
}

// usable reports whether x is a positive number within the range of part values.
func usable(x float64) bool { return x >= 1e-18 && x <= 1e18 }
