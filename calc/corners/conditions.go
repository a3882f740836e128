package corners

// ConditionCorners returns the distinct conditions of the worst points, tolerances
// typical, and for each target the index of its own; -1 for one without a worst
// point.
func ConditionCorners(p *Problem, extremes []Extreme) (corners [][]float64, of []int) {
	of = make([]int, len(extremes))
	for t := range extremes {
		of[t] = -1
		if extremes[t].At == nil {
			continue
		}
		z := make([]float64, len(p.Coordinates))
		for i := range z {
			if p.Coordinates[i].Kind != Random {
				z[i] = extremes[t].At[i]
			}
		}
		for k := range corners {
			if equal(corners[k], z) {
				of[t] = k
			}
		}
		if of[t] < 0 {
			of[t] = len(corners)
			corners = append(corners, z)
		}
	}
	return corners, of
}
