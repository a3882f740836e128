package corners

// NewSeeded prepares a search for a problem that resembles one whose worst points
// are known: it tries the typical point, each coordinate alone at its ends, the
// corners of the conditions and the given points, and then moves every coordinate of
// each target's worst point in turn until no single move worsens it. It spreads no
// points over the box and does not descend inside it, so that it takes a fifth of a
// search's evaluations; Covered says nothing of it.
func NewSeeded(p *Problem, points [][]float64) *Search {
	s := NewSearch(p)
	s.phases = []phase{&seeding{points: points}, &climbing{settle: true}}
	return s
}

// seeding tries given points beside those that need nothing known before.
type seeding struct {
	survey
	points [][]float64
}

func (y *seeding) propose(s *Search, b *batch) {
	p := s.p
	typical := make([]float64, len(p.Coordinates))
	b.add(FromNominal, typical)
	for i := range p.Coordinates {
		b.moved(typical, i, p.Coordinates[i].Low)
		b.moved(typical, i, p.Coordinates[i].High)
	}
	p.corners(b, FromConditionCorner, typical, p.conditions(), cornersUpTo)
	for _, z := range y.points {
		b.add(FromSearch, z)
	}
	y.scatter = b.len()
}
