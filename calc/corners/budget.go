package corners

// Cost is the number of evaluations that each part of an analysis takes at most.
// Monte Carlo and attribution tell theirs exactly.
type Cost struct {
	Search int // extreme values, without Resume
	Resume int // what a Resume with one point per target adds
	Linear int // root-sum-square
	Width  int // shares of the worst-case width
}

// Budget returns upper bounds of a problem's evaluations, known before it starts.
func Budget(p *Problem) Cost {
	n, targets := len(p.Coordinates), len(p.Targets)
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
	border := bordersKept * borderRounds * (borderSections - 1)
	return Cost{
		Search: survey + border + targets*(3*climb+(1+startsKept)*descent),
		Resume: targets * (1 + climb + descent),
		Linear: targets * (1 + 4*n + 2),
		Width:  targets * n,
	}
}
