package corners

// Cost is the number of evaluations that a part of the analysis takes at most.
type Cost struct {
	Search int // extreme values
}

// Budget returns an upper bound of the evaluations of a problem's search, known
// before it starts.
func Budget(p *Problem) Cost {
	n := len(p.Coordinates)
	ladders, levels := 0, 0
	for i := range p.Coordinates {
		ladders += len(p.ladder(i))
		levels += len(p.levels(i))
	}
	survey := 1 + 2*n + levels + scatterEvenly + scatterOnEnds
	if k := len(p.conditions()); k > 0 {
		survey += 1 << min(k, cornersUpTo)
	}
	if n <= allVerticesUpTo {
		survey += 1 << n
	}
	climb := climbRounds * (ladders + 3)
	line := 2*len(lengths) + 3
	descent := descentIterations * (2*n + line)
	perTarget := 3*climb + (1+startsKept)*descent
	return Cost{Search: survey + len(p.Targets)*perTarget + bordersKept*borderRounds*(borderSections-1)}
}
