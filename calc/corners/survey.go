package corners

import (
	"math"

	"railproof/calc/sampling"
)

const (
	allVerticesUpTo = 12   // coordinates: 4096 vertices
	cornersUpTo     = 6    // conditions and biases whose corners are all tried
	scatterEvenly   = 3072 // points anywhere in the box
	scatterOnEnds   = 2048 // points with tolerances at their ends and conditions anywhere
	startsKept      = 3    // of the scattered points, for each target
)

// start is a scattered point from which a target's descent begins.
type start struct {
	z     []float64
	score float64
}

// survey tries the points that need nothing known before.
type survey struct{ scatter int }

func (y *survey) propose(s *Search, b *batch) {
	p := s.p
	typical := make([]float64, len(p.Coordinates))
	b.add(FromNominal, typical)
	for i := range p.Coordinates {
		b.moved(typical, i, p.Coordinates[i].Low)
		b.moved(typical, i, p.Coordinates[i].High)
	}
	for i := range p.Coordinates {
		for _, l := range p.levels(i) {
			b.moved(typical, i, l)
		}
	}
	p.corners(b, FromConditionCorner, typical, p.conditions(), cornersUpTo)
	if all := p.every(); len(all) <= allVerticesUpTo {
		p.corners(b, FromVertex, typical, all, allVerticesUpTo)
	}
	y.scatter = b.len()
	p.scatter(b, typical)
	s.scattered = scatterEvenly
}

// scatter adds points over the box, independent of each other.
func (p *Problem) scatter(b *batch, typical []float64) {
	for k := range scatterEvenly + scatterOnEnds {
		z, key := b.add(FromSearch, typical), sampling.Key(p.Seed, uint64(k))
		for i := range z {
			c := &p.Coordinates[i]
			u := sampling.Uniform(key, uint64(i))
			switch {
			case k < scatterEvenly || c.Kind == Condition:
				z[i] = c.Low + u*(c.High-c.Low)
			case u < 0.5:
				z[i] = c.Low
			default:
				z[i] = c.High
			}
		}
	}
}

// corners adds every combination of ends of the listed coordinates, if they are
// not more than limit; otherwise the two diagonal ones.
func (p *Problem) corners(b *batch, from Origin, typical []float64, of []int, limit int) {
	if len(of) == 0 {
		return
	}
	for bits := range 1 << min(len(of), limit) {
		z := b.add(from, typical)
		for k, i := range of {
			if bits>>(k%limit)&1 == 1 {
				z[i] = p.Coordinates[i].High
			} else {
				z[i] = p.Coordinates[i].Low
			}
		}
	}
}

// conditions lists the coordinates that are not tolerances.
func (p *Problem) conditions() (list []int) {
	for i := range p.Coordinates {
		if p.Coordinates[i].Kind != Random {
			list = append(list, i)
		}
	}
	return list
}

func (p *Problem) every() []int {
	list := make([]int, len(p.Coordinates))
	for i := range list {
		list[i] = i
	}
	return list
}

func (y *survey) absorb(s *Search, b *batch) bool {
	q := b.quantities
	s.nominal = append([]float64(nil), b.result(0)...)
	s.nominalEnd = b.status[0]
	for end := range s.ends {
		s.ends[end] = make([]float64, b.dims*q)
		for i := range b.dims {
			copy(s.ends[end][i*q:], b.result(1+2*i+end))
		}
	}
	for k := range s.p.Targets {
		s.starts[k] = y.best(b, &s.p.Targets[k])
	}
	return true
}

// best returns the worst scattered points that lie well apart.
func (y *survey) best(b *batch, t *Target) []start {
	var kept []start
	for i := y.scatter; i < b.len(); i++ {
		score := b.score(i, t)
		if math.IsInf(score, -1) || len(kept) == startsKept && score <= kept[startsKept-1].score {
			continue
		}
		kept = insertApart(kept, start{b.point(i), score})
	}
	for i := range kept {
		kept[i].z = append([]float64(nil), kept[i].z...)
	}
	return kept
}

// insertApart puts a start in its place by score; of two that are close the lesser
// goes.
func insertApart(kept []start, x start) []start {
	for i := range kept {
		if !near(kept[i].z, x.z) {
			continue
		}
		if kept[i].score >= x.score {
			return kept
		}
		kept = append(kept[:i], kept[i+1:]...)
		break
	}
	at := len(kept)
	for at > 0 && kept[at-1].score < x.score {
		at--
	}
	kept = append(kept, start{})
	copy(kept[at+1:], kept[at:])
	kept[at] = x
	return kept[:min(len(kept), startsKept)]
}

// near reports whether two points are closer than a third of what two random
// points of the box are on average.
func near(a, b []float64) bool {
	d := 0.0
	for i := range a {
		d += (a[i] - b[i]) * (a[i] - b[i])
	}
	return d < float64(len(a))*2/27
}
