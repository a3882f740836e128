package corners

import "slices"

// conditionLevels is the number of equal steps across a condition: quantities bend
// over conditions far more than over tolerances.
const conditionLevels = 12

// levels returns the places between the ends at which a coordinate is tried, in
// rising order, 0 left out.
func (p *Problem) levels(i int) []float64 {
	c := &p.Coordinates[i]
	l := make([]float64, 0, conditionLevels+len(c.Levels))
	if c.Kind == Condition {
		for k := 1; k < conditionLevels; k++ {
			l = append(l, c.Low+(c.High-c.Low)*float64(k)/conditionLevels)
		}
	}
	for _, x := range c.Levels {
		if x > c.Low && x < c.High {
			l = append(l, x)
		}
	}
	slices.Sort(l)
	l = slices.Compact(l)
	return slices.DeleteFunc(l, func(x float64) bool { return x == 0 })
}

// ladder returns every place at which a coordinate is probed: the ends, the typical
// value and the levels between.
func (p *Problem) ladder(i int) []float64 {
	c := &p.Coordinates[i]
	l := append(p.levels(i), c.Low, 0, c.High)
	slices.Sort(l)
	return slices.Compact(l)
}
