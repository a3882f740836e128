package corners

import (
	"railproof/calc/evaluate"
	"railproof/calc/switched"
)

const (
	borderSections = 8 // parts into which a bracket is cut at once
	borderRounds   = 6 // 8^-6: the border to 4e-6 of a step
	bordersKept    = 64
)

// border is a place on a line through a target's point where the conduction mode or
// the status changes: quantities may jump or bend there, so both its sides are tried.
type border struct {
	z          []float64
	coordinate int
	lo, hi     float64
	status     evaluate.Status // at lo
	mode       switched.Mode
	first      int
}

// findBorders looks along the ladders just probed around a settled climb.
func (s *Search) findBorders(b *batch, w *climb, ladders [][]float64) {
	next := w.first + 1
	for i, ladder := range ladders {
		for k := 1; k < len(ladder); k++ {
			at := next + k
			if (b.mode[at] != b.mode[at-1] || b.status[at] != b.status[at-1]) && len(s.borders) < bordersKept {
				s.borders = append(s.borders, border{
					z: append([]float64(nil), w.at...), coordinate: i, lo: ladder[k-1], hi: ladder[k],
					status: b.status[at-1], mode: b.mode[at-1],
				})
			}
		}
		next += len(ladder)
	}
}

// bordering narrows every border down.
type bordering struct{ round int }

func (o *bordering) propose(s *Search, b *batch) {
	for i := range s.borders {
		r := &s.borders[i]
		r.first = b.len()
		for k := 1; k < borderSections; k++ {
			b.moved(r.z, r.coordinate, r.place(k))
		}
	}
}

func (r *border) place(k int) float64 { return r.lo + (r.hi-r.lo)*float64(k)/borderSections }

func (o *bordering) absorb(s *Search, b *batch) bool {
	for i := range s.borders {
		r := &s.borders[i]
		k := 1
		for k < borderSections && b.mode[r.first+k-1] == r.mode && b.status[r.first+k-1] == r.status {
			k++
		}
		lo, hi := r.place(k-1), r.hi
		if k < borderSections {
			hi = r.place(k)
		}
		r.lo, r.hi = lo, hi
	}
	o.round++
	if o.round < borderRounds && len(s.borders) > 0 {
		return false
	}
	s.borders = nil
	return true
}
