package corners

import "math"

const (
	descentIterations = 24
	firstStep         = 0.25      // of a half width
	lastStep          = 1.0 / 512 // below it the value of a smooth worst point moves by 1e-6
	stepShrink        = 4
)

// descending goes from the worst points of every target to the nearest stationary
// worst point inside the box: slopes and curvatures by differences along every
// coordinate, then a line of candidates along a quasi-Newton step, a diagonal Newton
// step and the last move. All descents advance together, one batch per step.
//
// It needs no derivative and no convexity: where nothing gains, the step of the
// differences shrinks, so that kinks and jumps end it within its bounds.
type descending struct {
	descents []descent
}

type descent struct {
	target    int
	at        []float64
	score     float64
	iteration int
	step      float64
	line      bool // the proposals are candidates along a line, not differences
	done      bool
	first, n  int

	up, down   []int // index in the batch of the neighbour on each side; -1: the end
	slope      []float64
	newton     []float64
	bestSide   []float64
	bestSingle []float64 // best neighbour
	singleAt   float64   // its score
	last       []float64 // where the previous iteration stood; nil: none
	model      quasiNewton
}

func (g *descending) propose(s *Search, b *batch) {
	if g.descents == nil {
		g.begin(s)
	}
	for i := range g.descents {
		d := &g.descents[i]
		if d.done {
			continue
		}
		d.first = b.len()
		if d.line {
			d.proposeLine(s.p, b)
		} else {
			d.proposeNeighbours(s.p, b)
		}
		d.n = b.len() - d.first
	}
}

func (g *descending) begin(s *Search) {
	g.descents = []descent{}
	for k := range s.found {
		if s.found[k].At == nil || s.resting[k] {
			continue
		}
		g.add(k, s.found[k].At, s.found[k].score)
		for _, st := range s.starts[k] {
			g.add(k, st.z, st.score)
		}
		s.starts[k] = nil
	}
}

func (g *descending) add(target int, z []float64, score float64) {
	n := len(z)
	g.descents = append(g.descents, descent{
		target: target, at: append([]float64(nil), z...), score: score, step: firstStep,
		up: make([]int, n), down: make([]int, n), slope: make([]float64, n), newton: make([]float64, n),
		bestSide: make([]float64, n), bestSingle: make([]float64, n), model: newQuasiNewton(n),
	})
}

func (d *descent) proposeNeighbours(p *Problem, b *batch) {
	for i := range d.at {
		c := &p.Coordinates[i]
		d.up[i], d.down[i] = -1, -1
		if d.at[i] < c.High {
			d.up[i] = b.len()
			b.moved(d.at, i, min(c.High, d.at[i]+d.step))
		}
		if d.at[i] > c.Low {
			d.down[i] = b.len()
			b.moved(d.at, i, max(c.Low, d.at[i]-d.step))
		}
	}
}

func (g *descending) absorb(s *Search, b *batch) bool {
	all := true
	for i := range g.descents {
		d := &g.descents[i]
		if d.done {
			continue
		}
		if d.line {
			d.takeLine(s, b)
		} else {
			d.takeNeighbours(s, b)
		}
		all = all && d.done
	}
	return all
}

// takeNeighbours forms slope and curvature of the score and sets out the line.
func (d *descent) takeNeighbours(s *Search, b *batch) {
	t := &s.p.Targets[d.target]
	d.singleAt = d.score
	for i := range d.at {
		fu, hu := d.neighbour(b, t, i, d.up[i])
		fd, hd := d.neighbour(b, t, i, d.down[i])
		d.bestSide[i] = d.at[i]
		if fu > d.score && fu >= fd {
			d.bestSide[i] = d.at[i] + hu
		} else if fd > d.score {
			d.bestSide[i] = d.at[i] - hd
		}
		if best := max(fu, fd); best > d.singleAt {
			d.singleAt = best
			copy(d.bestSingle, d.at)
			d.bestSingle[i] = d.bestSide[i]
		}
		d.slope[i], d.newton[i] = localStep(d.score, fu, fd, hu, hd)
		c := &s.p.Coordinates[i]
		if d.slope[i] > 0 && d.at[i] >= c.High || d.slope[i] < 0 && d.at[i] <= c.Low {
			d.slope[i], d.newton[i] = 0, 0
		}
	}
	d.model.update(d.at, d.slope, d.newton)
	d.line = true
}

// neighbour returns the score and distance of a neighbour; -Inf and 0 at an end.
func (d *descent) neighbour(b *batch, t *Target, i, at int) (score, distance float64) {
	if at < 0 {
		return math.Inf(-1), 0
	}
	return b.score(at, t), math.Abs(b.point(at)[i] - d.at[i])
}

// localStep returns the slope of the score along a coordinate and the step to the
// top of the parabola through its three values; uphill across the box where the
// parabola has no top. Values that do not exist are walls.
func localStep(f, fu, fd, hu, hd float64) (slope, step float64) {
	up, down := !math.IsInf(fu, -1), !math.IsInf(fd, -1)
	const across = 2
	switch {
	case math.IsInf(f, -1):
		return 0, 0
	case up && down:
		su, sd := (fu-f)/hu, (f-fd)/hd
		slope = (su*hd + sd*hu) / (hu + hd)
		if curvature := 2 * (su - sd) / (hu + hd); curvature < 0 {
			return slope, max(-across, min(across, -slope/curvature))
		}
	case up:
		slope = max(0, (fu-f)/hu)
	case down:
		slope = min(0, (f-fd)/hd)
	}
	if slope == 0 {
		return 0, 0
	}
	return slope, math.Copysign(across, slope)
}

// lengths are the parts of a step that a line tries.
var lengths = [...]float64{2, 1, 0.5, 0.2, 0.05}

func (d *descent) proposeLine(p *Problem, b *batch) {
	for _, direction := range [][]float64{d.newton, d.model.direction(d.slope)} {
		if direction == nil || zero(direction) {
			continue
		}
		for _, l := range lengths {
			p.step(b, d.at, direction, l)
		}
	}
	b.add(FromSearch, d.bestSide)
	if d.last != nil {
		move := make([]float64, len(d.at))
		for i := range move {
			move[i] = d.at[i] - d.last[i]
		}
		p.step(b, d.at, move, 1)
		p.step(b, d.at, move, 3)
	}
}

// step adds the point at a length along a direction, held inside the box.
func (p *Problem) step(b *batch, at, direction []float64, length float64) {
	z := b.add(FromSearch, at)
	for i := range z {
		c := &p.Coordinates[i]
		z[i] = max(c.Low, min(c.High, at[i]+length*direction[i]))
	}
}

func zero(v []float64) bool {
	for _, x := range v {
		if x != 0 {
			return false
		}
	}
	return true
}

func (d *descent) takeLine(s *Search, b *batch) {
	t := &s.p.Targets[d.target]
	best, to := d.singleAt, d.bestSingle
	for i := d.first; i < d.first+d.n; i++ {
		if v := b.score(i, t); v > best {
			best, to = v, b.point(i)
		}
	}
	d.line = false
	d.iteration++
	gain := best - d.score
	if best > d.score {
		d.last = append(d.last[:0], d.at...)
		copy(d.at, to)
		d.score = best
	}
	if !(gain > significant*s.width(t.Quantity)) {
		if d.step <= lastStep {
			d.done = true
		}
		if zero(d.slope) { // at an end in every direction: one look from close by
			d.step = min(d.step, lastStep*stepShrink)
		}
		d.step = max(lastStep, d.step/stepShrink)
		d.last = nil
		d.model.reset()
	}
	d.done = d.done || d.iteration >= descentIterations
}
