package parts

import "math"

// LeakageAt returns the reverse current [A] at a junction temperature and its
// slope over temperature [A/K].
//
//	ln Ir(Tj) linear between the points of Leakage, on with the last slope beyond
//
// An empty table is no leakage, one point a constant. Points at zero have no
// logarithm; a segment that touches one is linear in the current itself.
//
// Silicon and Schottky leakage doubles about every 10 K (remembered, unverified);
// two data-sheet points carry the part's own rate.
func (d *Diode) LeakageAt(junctionDegC float64) (i, slope float64) {
	t := &d.Leakage
	n := len(t.X)
	switch n {
	case 0:
		return 0, 0
	case 1:
		return t.Y[0], 0
	}
	k := 1
	for k < n-1 && junctionDegC > t.X[k] {
		k++
	}
	x0, x1, y0, y1 := t.X[k-1], t.X[k], t.Y[k-1], t.Y[k]
	if !(y0 > 0 && y1 > 0) {
		slope = (y1 - y0) / (x1 - x0)
		i = y0 + slope*(junctionDegC-x0)
		if i < 0 {
			return 0, 0
		}
		return i, slope
	}
	rate := math.Log(y1/y0) / (x1 - x0)
	i = y0 * math.Exp(rate*(junctionDegC-x0))
	return i, i * rate
}
