package switched

import "math"

// watch is a sum over the states whose range over an interval is sought.
type watch struct {
	w    vec
	only int // the one state it consists of, −1 for more
	span extent
}

func (wt *watch) of(x *vec, n int) float64 {
	if wt.only >= 0 {
		return x[wt.only]
	}
	return dot(&wt.w, x, n)
}

// extremes widens the range of every conducting current by what it reaches in
// interval k, and that of the output node if out is given.
func (s *Solver) extremes(k int, rate *vec, legs *[MaxPhases]legTally, out *extent) {
	nw := &s.nw
	v := &s.iv[k]
	count := 0
	for j := range nw.phases {
		if v.top.pos[j] != resting {
			s.watches[count].only = j
			count++
		}
	}
	if out != nil {
		s.watchNode(count)
		count++
	}
	s.scan(k, rate, count)
	count = 0
	for j := range nw.phases {
		if v.top.pos[j] != resting {
			e := &s.watches[count].span
			into := &legs[s.legOf(j)].span
			into.add(s.ref.i[j] + e.least)
			into.add(s.ref.i[j] + e.most)
			count++
		}
	}
	if out != nil {
		e := &s.watches[count].span
		out.add(e.least)
		out.add(e.most)
	}
}

// watchNode makes watch i that of the output node.
func (s *Solver) watchNode(i int) {
	s.watches[i] = watch{only: -1}
	for j := range s.nw.phases + s.nw.banks {
		s.watches[i].w[j] = s.weight(j)
	}
}

// nodeRange returns the range of the node's deviation over the periodic state.
func (s *Solver) nodeRange() extent {
	out := extent{math.Inf(1), math.Inf(-1)}
	s.watchNode(0)
	for k := range s.count {
		v, ld := &s.iv[k], s.rungs(k)
		rate := &s.moments.y0
		v.top.slope(&s.nw, &v.start, rate)
		s.work.set(ld, ld.cell, &v.start, rate, s.nw.n)
		s.scan(k, rate, 1)
		out.add(s.watches[0].span.least)
		out.add(s.watches[0].span.most)
	}
	return out
}

// scan finds the ranges of the first count watches over interval k, which starts
// at the given rate and whose first Taylor cell is at hand.
//
// The rates are followed on a mesh that starts at the first rung and widens with
// the distance from the edge, as the stiff modes die away. Where a rate changes
// sign the step is halved by the rungs below it down to the first, over which a
// Taylor cell gives the extreme.
func (s *Solver) scan(k int, rate *vec, count int) {
	n := s.nw.n
	v := &s.iv[k]
	ld := s.rungs(k)
	watches := s.watches[:count]
	for i := range watches {
		wt := &watches[i]
		a, b := wt.of(&v.start, n), wt.of(&v.stop, n)
		wt.span = extent{min(a, b), max(a, b)}
		s.work.pick(wt, n)
		s.work.extremes(&wt.span)
	}
	if ld.levels == ld.cell {
		return
	}
	buffer := [2]vec{*rate}
	y, yb := &buffer[0], &buffer[1]
	ld.stepRate(ld.cell, y, y, n)
	at := 1 << ld.cell // in first rungs
	for l := ld.cell; l < ld.levels; l++ {
		m := l - 1 // two steps per doubling, four in the last two
		if l >= ld.levels-2 {
			m--
		}
		for range 1 << (l - m) {
			ld.stepRate(m, y, yb, n)
			for i := range watches {
				wt := &watches[i]
				if (wt.of(y, n) < 0) != (wt.of(yb, n) < 0) {
					s.descend(v, ld, m, at, *y, wt)
				}
			}
			y, yb = yb, y
			at += 1 << m
		}
	}
}

// descend finds the extreme of a watch in the step of rung m that starts after
// at first rungs with rate y.
func (s *Solver) descend(v *interval, ld *ladder, m, at int, y vec, wt *watch) {
	n := s.nw.n
	for ; m > 0; m-- {
		ym := y
		ld.stepRate(m-1, &y, &ym, n)
		if (wt.of(&y, n) < 0) == (wt.of(&ym, n) < 0) {
			at += 1 << (m - 1)
			y = ym
		}
	}
	x := v.start
	for l := 0; at > 0; l++ {
		if at&1 != 0 {
			ld.step(l, &x, &x, n)
		}
		at >>= 1
	}
	s.work.set(ld, m, &x, &y, n)
	s.work.pick(wt, n)
	s.work.extremes(&wt.span)
}
