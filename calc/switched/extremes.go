package switched

// extremes widens the range of every conducting current and of the output node
// by what they reach in interval k.
//
// The rates are followed on a mesh that starts at the first rung and widens with
// the distance from the edge, as the stiff modes die away. Where a rate changes
// sign the step is halved by the rungs below it until the Taylor cell is
// reached, whose polynomial gives the extreme.
func (s *Solver) extremes(k int, rate *vec, legs *[MaxPhases]legTally, out *extent) {
	nw, n := &s.nw, s.nw.n
	v := &s.iv[k]
	ld := s.rungs(k)
	var watch [MaxPhases + 1]vec
	var into [MaxPhases + 1]*extent
	for i := range n {
		watch[0][i] = s.weight(i)
	}
	into[0] = out
	count := 1
	for j := range nw.phases {
		if v.top.pos[j] == Resting {
			continue
		}
		watch[count][j] = 1
		into[count] = &legs[s.legOf(j)].range_
		count++
	}
	var low [MaxPhases + 1]extent
	for w := range count {
		a, b := dot(&watch[w], &v.start, n), dot(&watch[w], &v.stop, n)
		low[w] = extent{min(a, b), max(a, b)}
	}
	for w := range count {
		s.work.pick(&watch[w], n) // still the first cell of the interval, set by moments
		s.work.extremes(&low[w])
	}
	x, y := v.start, *rate
	ld.step(0, &x, &x, n)
	ld.stepRate(0, &y, &y, n)
	for l := range ld.levels {
		m := max(l-2, 0)
		for range 1 << (l - m) {
			xb, yb := x, y
			ld.step(m, &x, &xb, n)
			ld.stepRate(m, &y, &yb, n)
			for w := range count {
				ra, rb := dot(&watch[w], &y, n), dot(&watch[w], &yb, n)
				if (ra < 0) != (rb < 0) {
					s.descend(&v.top, ld, m, x, y, &watch[w], &low[w])
				}
			}
			x, y = xb, yb
		}
	}
	for w := range count {
		add := 0.0
		if w > 0 {
			for j := range nw.phases {
				if watch[w][j] == 1 {
					add = s.ref.i[j]
				}
			}
		}
		into[w].add(add + low[w].least)
		into[w].add(add + low[w].most)
	}
}

// descend finds the extreme of the functional w in the step of rung m that
// starts at x with rate y.
func (s *Solver) descend(tp *topology, ld *ladder, m int, x, y vec, w *vec, e *extent) {
	n := s.nw.n
	for ; m > 0; m-- {
		ym := y
		ld.stepRate(m-1, &y, &ym, n)
		if (dot(w, &y, n) < 0) == (dot(w, &ym, n) < 0) {
			ld.step(m-1, &x, &x, n)
			y = ym
		}
	}
	s.work.set(&s.nw, tp, &x, &y, ld.h[0])
	s.work.pick(w, n)
	s.work.extremes(e)
}

func dot(w, x *vec, n int) float64 {
	acc := 0.0
	for i := range n {
		acc += w[i] * x[i]
	}
	return acc
}
