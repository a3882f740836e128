// Package numeric holds the small numerical tools that several physical
// packages share: piecewise-linear tables and scalar root finding.
package numeric

// Table is a piecewise-linear function given by points. X is strictly
// increasing and as long as Y; an empty table is the constant 1, so that an
// absent multiplier leaves its base value alone.
//
// Beyond the ends the table goes on with the slope of its last segment, and a
// caller that must tell its user so asks Covers.
type Table struct {
	X []float64 // [any]
	Y []float64 // [any]

	slopes []float64 // of each segment, once Prepare was called
}

// Prepare computes the segments' slopes once, for tables that are read often.
// The points may not change afterwards.
func (t *Table) Prepare() {
	if len(t.X) < 2 {
		return
	}
	t.slopes = make([]float64, len(t.X)-1)
	for i := range t.slopes {
		t.slopes[i] = t.slope(i + 1)
	}
}

func (t *Table) slope(i int) float64 { return (t.Y[i] - t.Y[i-1]) / (t.X[i] - t.X[i-1]) }

// At returns the table's value at x, linear between points.
// A table of one point is constant.
func (t *Table) At(x float64) float64 {
	y, _ := t.AtSlope(x)
	return y
}

// AtSlope returns the value at x and the slope dy/dx of the segment used.
func (t *Table) AtSlope(x float64) (y, slope float64) {
	at := t.X
	switch len(at) {
	case 0:
		return 1, 0
	case 1:
		return t.Y[0], 0
	}
	i := 0
	for i < len(at)-2 && x > at[i+1] {
		i++
	}
	if i < len(t.slopes) {
		slope = t.slopes[i]
	} else {
		slope = t.slope(i + 1)
	}
	return t.Y[i] + float64(slope*(x-at[i])), slope
}

// Covers reports whether x lies within the table's ends. An empty table covers
// everything; a table of one point covers that point only.
func (t *Table) Covers(x float64) bool {
	n := len(t.X)
	return n == 0 || x >= t.X[0] && x <= t.X[n-1]
}

// Empty reports whether the table has no points.
func (t *Table) Empty() bool { return len(t.X) == 0 }

// Integral returns the integral of the table from a to b, exact for its
// piecewise-linear form including the continued ends.
func (t *Table) Integral(a, b float64) float64 {
	if b < a {
		return -t.Integral(b, a)
	}
	sum, at := 0.0, a
	for _, x := range t.X {
		if x > at && x < b {
			sum += (x - at) * (t.At(at) + t.At(x)) / 2
			at = x
		}
	}
	return sum + (b-at)*(t.At(at)+t.At(b))/2
}
