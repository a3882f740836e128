package corners

import "math"

const (
	climbRounds = 6    // sensitivities at the vertex found seldom change sign twice
	significant = 1e-9 // least gain that counts, relative to the quantity's span
)

// climbing moves every target's point to the best place of each coordinate in turn
// until no single move worsens the quantity: the signs of the sensitivities hold at
// the vertex found.
type climbing struct {
	settle  bool // from the worst point only, to confirm it
	climbs  []climb
	ladders [][]float64
}

// climb is one target's walk over the ladders of all coordinates.
type climb struct {
	target   int
	at       []float64
	score    float64
	round    int
	done     bool
	first    int       // its first proposal in the batch
	combined bool      // the proposals are combinations, not single moves
	best     []float64 // best place of each coordinate
	gain     []float64
}

func (c *climbing) propose(s *Search, b *batch) {
	if c.climbs == nil {
		c.begin(s)
	}
	for i := range c.climbs {
		w := &c.climbs[i]
		if w.done {
			continue
		}
		w.first = b.len()
		if w.combined {
			w.proposeCombined(b)
			continue
		}
		b.add(FromSearch, w.at)
		for k, ladder := range c.ladders {
			for _, l := range ladder {
				b.moved(w.at, k, l)
			}
		}
	}
}

func (c *climbing) begin(s *Search) {
	c.ladders = make([][]float64, len(s.p.Coordinates))
	for i := range c.ladders {
		c.ladders[i] = s.p.ladder(i)
	}
	c.climbs = make([]climb, 0, 2*len(s.found))
	add := func(target int, z []float64) {
		d := len(z)
		c.climbs = append(c.climbs, climb{target: target, at: append([]float64(nil), z...), best: make([]float64, d), gain: make([]float64, d)})
	}
	for k := range s.found {
		if s.found[k].At == nil || s.resting[k] {
			continue // no point had a value
		}
		if !c.settle {
			add(k, s.signVertex(k))
		}
		add(k, s.found[k].At)
	}
}

// signVertex is the vertex that the one-at-a-time values point to.
func (s *Search) signVertex(target int) []float64 {
	t := &s.p.Targets[target]
	z := make([]float64, len(s.p.Coordinates))
	for i := range z {
		low, high := s.OneAtATime(i, t.Quantity)
		z[i] = s.p.Coordinates[i].High
		if t.score(low) > t.score(high) {
			z[i] = s.p.Coordinates[i].Low
		}
	}
	return z
}

// proposeCombined tries all moves that gain at once, and the better half of them.
func (w *climb) proposeCombined(b *batch) {
	mean, n := 0.0, 0.0
	for _, g := range w.gain {
		if g > 0 {
			mean, n = mean+g, n+1
		}
	}
	mean /= n
	for _, least := range []float64{0, mean} {
		z := b.add(FromSearch, w.at)
		for i, g := range w.gain {
			if g > 0 && g >= least {
				z[i] = w.best[i]
			}
		}
	}
}

func (c *climbing) absorb(s *Search, b *batch) bool {
	all := true
	for i := range c.climbs {
		w := &c.climbs[i]
		if w.done {
			continue
		}
		if w.combined {
			w.takeCombined(s, b)
		} else {
			w.takeSingle(s, b, c.ladders)
		}
		all = all && w.done
	}
	return all
}

func (w *climb) takeSingle(s *Search, b *batch, ladders [][]float64) {
	t := &s.p.Targets[w.target]
	w.score = b.score(w.first, t)
	least := significant * s.width(t.Quantity)
	next, any := w.first+1, false
	for i, ladder := range ladders {
		w.gain[i] = 0
		for _, l := range ladder {
			if g := b.score(next, t) - w.score; g > least && g > w.gain[i] {
				w.gain[i], w.best[i], any = g, l, true
			}
			next++
		}
	}
	switch {
	case math.IsInf(w.score, -1) && any:
		w.takeBestSingle()
	case any:
		w.combined = true
	default:
		w.done = true
		s.findBorders(b, w, ladders)
	}
}

// takeBestSingle leaves a point without a value by the first move that has one.
func (w *climb) takeBestSingle() {
	for i, g := range w.gain {
		if g > 0 {
			w.at[i] = w.best[i]
			break
		}
	}
	w.round++
	w.done = w.round >= climbRounds
}

func (w *climb) takeCombined(s *Search, b *batch) {
	t := &s.p.Targets[w.target]
	single := 0
	for i, g := range w.gain {
		if g > w.gain[single] {
			single = i
		}
	}
	best, score := -1, w.score+w.gain[single]
	for i := w.first; i < w.first+2; i++ {
		if v := b.score(i, t); v > score {
			best, score = i, v
		}
	}
	if best < 0 {
		w.at[single] = w.best[single]
	} else {
		copy(w.at, b.point(best))
	}
	w.combined = false
	w.round++
	w.done = w.round >= climbRounds
}
