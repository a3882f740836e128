package parts

import "railproof/calc/numeric"

// MultiplierFloor is the least multiplier that a table's continuation beyond its
// ends may reach: a part keeps at least a tenth of its value. It keeps
// inductance, capacitance and resistance positive; it never lifts a value that
// the table itself states, and it lies on the side where no thermal runaway can
// be hidden.
const MultiplierFloor = 0.1 // [1]

// overTemperature reads a multiplier table over temperature: linear in between,
// on with the slope of the end segment beyond the ends, not below the floor.
func overTemperature(t *numeric.Table, degC float64) (y, slope float64) {
	y, slope = t.AtSlope(degC)
	if y >= MultiplierFloor || t.Covers(degC) {
		return y, slope
	}
	end := t.Y[0]
	if degC > t.X[0] {
		end = t.Y[len(t.Y)-1]
	}
	if floor := min(MultiplierFloor, end); y < floor {
		return floor, 0
	}
	return y, slope
}

// overBias reads a multiplier table over a current or voltage magnitude x >= 0:
// constant below the first point, linear in between, on with the last slope
// beyond the last point, not below the floor.
func overBias(t *numeric.Table, x float64) float64 {
	n := len(t.X)
	switch {
	case n == 0:
		return 1
	case n == 1 || x <= t.X[0]:
		return t.Y[0]
	}
	y := t.At(x)
	if x > t.X[n-1] {
		y = max(y, min(MultiplierFloor, t.Y[n-1]))
	}
	return y
}

// biasMoments returns the integrals of m(x) and of x m(x) from a to b, where
// 0 <= a <= b and m is overBias. Both are exact: m is linear between the table's
// points and the point where the floor begins.
func biasMoments(t *numeric.Table, a, b float64) (zeroth, first float64) {
	n := len(t.X)
	at, y := a, overBias(t, a)
	for i := 0; i <= n && at < b; i++ {
		next := b
		if i < n {
			next = min(b, t.X[i])
		} else if floor := floorBegins(t); floor < b {
			next = max(at, floor)
		}
		if next <= at {
			continue
		}
		at, y, zeroth, first = addPiece(t, at, y, next, zeroth, first)
	}
	if at < b {
		_, _, zeroth, first = addPiece(t, at, y, b, zeroth, first)
	}
	return zeroth, first
}

// addPiece adds the piece [p, q] on which m is linear; Simpson's rule is exact
// for the quadratic x m(x).
func addPiece(t *numeric.Table, p, mp, q, zeroth, first float64) (at, y, z, f float64) {
	mq := overBias(t, q)
	w := q - p
	zeroth += w * (mp + mq) / 2
	first += w * (p*mp + (p+q)*(mp+mq) + q*mq) / 6
	return q, mq, zeroth, first
}

// floorBegins returns the x beyond the table's end at which its continuation
// meets the floor; far beyond any value when it does not.
func floorBegins(t *numeric.Table) float64 {
	const never = 1e300
	n := len(t.X)
	if n < 2 {
		return never
	}
	slope := (t.Y[n-1] - t.Y[n-2]) / (t.X[n-1] - t.X[n-2])
	if slope >= 0 || t.Y[n-1] <= MultiplierFloor {
		return never
	}
	return t.X[n-1] + (MultiplierFloor-t.Y[n-1])/slope
}
