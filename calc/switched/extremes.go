package switched

// watch is a sum over the states whose range over an interval is sought.
type watch struct {
	w      vec
	range_ extent
}

// extremes widens the range of every conducting current and of the output node
// by what they reach in interval k.
func (s *Solver) extremes(k int, rate *vec, legs *[MaxPhases]legTally, out *extent) {
	nw := &s.nw
	v := &s.iv[k]
	s.watches[0].w = vec{}
	for i := range nw.phases + nw.banks {
		s.watches[0].w[i] = s.weight(i)
	}
	count := 1
	for j := range nw.phases {
		if v.top.pos[j] != Resting {
			s.watches[count].w = vec{}
			s.watches[count].w[j] = 1
			count++
		}
	}
	s.scan(k, rate, count)
	out.add(s.watches[0].range_.least)
	out.add(s.watches[0].range_.most)
	count = 1
	for j := range nw.phases {
		if v.top.pos[j] != Resting {
			e := &s.watches[count].range_
			into := &legs[s.legOf(j)].range_
			into.add(s.ref.i[j] + e.least)
			into.add(s.ref.i[j] + e.most)
			count++
		}
	}
}

// scan finds the ranges of the first count watches over interval k, which starts
// at the given rate and whose first Taylor cell is at hand.
//
// The rates are followed on a mesh that starts at the first rung and widens with
// the distance from the edge, as the stiff modes die away. Where a rate changes
// sign the step is halved by the rungs below it until the Taylor cell is
// reached, whose polynomial gives the extreme.
func (s *Solver) scan(k int, rate *vec, count int) {
	n := s.nw.n
	v := &s.iv[k]
	ld := s.rungs(k)
	watches := s.watches[:count]
	for i := range watches {
		wt := &watches[i]
		a, b := dot(&wt.w, &v.start, n), dot(&wt.w, &v.stop, n)
		wt.range_ = extent{min(a, b), max(a, b)}
		s.work.pick(&wt.w, n)
		s.work.extremes(&wt.range_)
	}
	if ld.levels == 0 {
		return
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
			for i := range watches {
				wt := &watches[i]
				ra, rb := dot(&wt.w, &y, n), dot(&wt.w, &yb, n)
				if (ra < 0) != (rb < 0) {
					s.descend(&v.top, ld, m, x, y, &wt.w, &wt.range_)
				}
			}
			x, y = xb, yb
		}
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
