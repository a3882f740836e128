package corners

// resumed evaluates further points and rests the targets that they do not worsen.
type resumed struct {
	points  [][]float64
	samples []int
	before  []float64
}

func (r *resumed) propose(s *Search, b *batch) {
	for _, z := range r.points {
		b.add(FromSample, z)
	}
	for i := range s.found {
		r.before = append(r.before, s.found[i].score)
	}
}

func (r *resumed) absorb(s *Search, b *batch) bool {
	for k := range s.found {
		f := &s.found[k]
		s.resting[k] = f.score == r.before[k]
		if s.resting[k] {
			continue
		}
		for i := range r.points {
			if b.score(i, &f.Target) == f.score {
				f.Sample = r.samples[i]
				break
			}
		}
	}
	return true
}
