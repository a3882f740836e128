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
	if t.Empty() { // small enough to be inlined
		return 1, 0
	}
	return multiplier(t, degC)
}

func multiplier(t *numeric.Table, degC float64) (y, slope float64) {
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
// points, and beyond them up to where the floor begins.
func biasMoments(t *numeric.Table, a, b float64) (zeroth, first float64) {
	n := len(t.X)
	if n == 0 {
		return constantPiece(1, a, b)
	}
	if n == 1 || b <= t.X[0] {
		return constantPiece(t.Y[0], a, b)
	}
	if a < t.X[0] {
		zeroth, first = constantPiece(t.Y[0], a, t.X[0])
		a = t.X[0]
	}
	i := 1
	for ; i < n && a < b; i++ {
		if a < t.X[i] {
			q := min(b, t.X[i])
			z, f := linearPiece(t, i, a, q)
			zeroth, first, a = zeroth+z, first+f, q
		}
	}
	if a < b {
		z, f := tailMoments(t, a, b)
		zeroth, first = zeroth+z, first+f
	}
	return zeroth, first
}

// tailMoments is biasMoments beyond the table's end: the last slope, then the
// floor.
func tailMoments(t *numeric.Table, a, b float64) (zeroth, first float64) {
	n := len(t.X)
	last := t.Y[n-1]
	floor := min(MultiplierFloor, last)
	q := b
	if slope := (last - t.Y[n-2]) / (t.X[n-1] - t.X[n-2]); slope < 0 {
		q = min(b, t.X[n-1]+(floor-last)/slope)
	}
	if a < q {
		zeroth, first = linearPiece(t, n-1, a, q)
		a = q
	}
	if a < b {
		z, f := constantPiece(floor, a, b)
		zeroth, first = zeroth+z, first+f
	}
	return zeroth, first
}

func constantPiece(m, p, q float64) (zeroth, first float64) {
	zeroth = m * (q - p)
	return zeroth, zeroth * (p + q) / 2
}

// linearPiece integrates segment i of the table from p to q; Simpson's rule is
// exact for the quadratic x m(x).
func linearPiece(t *numeric.Table, i int, p, q float64) (zeroth, first float64) {
	slope := (t.Y[i] - t.Y[i-1]) / (t.X[i] - t.X[i-1])
	mp := t.Y[i-1] + slope*(p-t.X[i-1])
	mq := t.Y[i-1] + slope*(q-t.X[i-1])
	w := q - p
	return w * (mp + mq) / 2, w * (p*mp + (p+q)*(mp+mq) + q*mq) / 6
}
