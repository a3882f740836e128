package corners

import (
	"math"
	"slices"

	"railproof/calc/evaluate"
	"railproof/calc/sampling"
	"railproof/calc/switched"
)

// tally is what one worker has counted. Everything in it is integer, exact or the
// greatest of a total order, so tallies merge to the same bits in any order.
type tally struct {
	sketches []sketch        // [(replicate*corners + corner)*quantities + quantity]
	passes   []int           // per replicate
	units    []int           // per replicate
	beyond   []int           // [corner*limits + limit]: units beyond the limit there
	broken   []int           // per limit: units beyond it at any corner
	failures []FailureCount  // [corner*statuses + status]
	worst    [][]WorstSample // per target
	most     int             // worst samples kept

	near   []Model // per corner
	cursor *sampling.Cursor
	u, z   []float64
	out    []float64         // [corner][unit][quantity]
	status []evaluate.Status // [corner][unit]
	mode   []switched.Mode
	fails  []bool // per limit, of the unit at hand
}

func (m *MonteCarlo) newTally() *tally {
	corners, q := len(m.plan.Corners), m.p.Quantities
	t := &tally{
		sketches: make([]sketch, m.sampler.Replicates()*corners*q),
		passes:   make([]int, m.sampler.Replicates()),
		units:    make([]int, m.sampler.Replicates()),
		beyond:   make([]int, corners*len(m.plan.Limits)),
		broken:   make([]int, len(m.plan.Limits)),
		failures: make([]FailureCount, corners*int(evaluate.StatusCount)),
		worst:    make([][]WorstSample, len(m.p.Targets)),
		most:     m.plan.Worst,
		cursor:   m.sampler.Cursor(),
		u:        make([]float64, m.place.Len()),
		z:        make([]float64, len(m.p.Coordinates)),
		out:      make([]float64, m.unitsPerTask()*corners*q),
		status:   make([]evaluate.Status, m.unitsPerTask()*corners),
		mode:     make([]switched.Mode, m.unitsPerTask()*corners),
		fails:    make([]bool, len(m.plan.Limits)),
	}
	counts := make([]uint32, len(t.sketches)*(m.bins+2))
	for i := range t.sketches {
		t.sketches[i] = newSketch(counts[i*(m.bins+2):][: m.bins+2 : m.bins+2])
	}
	return t
}

// run evaluates the units from first to last, all of one replicate.
func (t *tally) run(m *MonteCarlo, model Model, first, last int) {
	corners, q := len(m.plan.Corners), m.p.Quantities
	n := last - first
	replicate := first / m.sampler.PerReplicate()
	if t.near == nil {
		t.near = modelsNear(model, m.plan.Corners)
	}
	for i := range n {
		k := m.plan.First + first + i
		t.cursor.Point(k, t.u)
		passed := true
		clear(t.fails)
		for c, at := range m.plan.Corners {
			copy(t.z[len(t.u):], at[len(t.u):])
			m.place.Place(t.u, t.z)
			out := t.out[(c*n+i)*q:][:q]
			status, mode := t.near[c].Eval(t.z, out)
			t.status[c*n+i], t.mode[c*n+i] = status, mode
			if !status.OK() {
				passed = false
				t.fail(status, c, k)
			}
			passed = t.check(m.plan.Limits, out, c) && passed
		}
		t.units[replicate]++
		if passed {
			t.passes[replicate]++
		}
		for l, f := range t.fails {
			if f {
				t.broken[l]++
			}
		}
	}
	for c := range corners {
		column := t.out[c*n*q : (c+1)*n*q]
		for j := range q {
			t.sketches[(replicate*corners+c)*q+j].add(&m.grids[c*q+j], column, j, q)
		}
		for k := range t.worst {
			t.keepWorst(m, k, column, m.plan.First+first, c, c*n)
		}
	}
}

func (t *tally) fail(status evaluate.Status, corner, sample int) {
	f := &t.failures[corner*int(evaluate.StatusCount)+int(status)]
	if f.Count == 0 || sample < f.First {
		f.First = sample
	}
	f.Status, f.Corner = status, corner
	f.Count++
}

// check counts the limits that a unit breaks; a value that does not exist passes no
// limit.
func (t *tally) check(limits []Limit, out []float64, corner int) bool {
	passed := true
	for l := range limits {
		v := out[limits[l].Quantity]
		if v < limits[l].Min || v > limits[l].Max || v != v {
			t.beyond[corner*len(limits)+l]++
			t.fails[l] = true
			passed = false
		}
	}
	return passed
}

// keepWorst puts a corner's results among the worst of a target. Its statuses stand
// from the given place.
func (t *tally) keepWorst(m *MonteCarlo, k int, column []float64, first, corner, ends int) {
	target, kept := &m.p.Targets[k], t.worst[k]
	if t.most == 0 {
		return
	}
	least := math.Inf(-1)
	if len(kept) == t.most {
		least = kept[t.most-1].score
	}
	sign := 1.0
	if target.Direction == Least {
		sign = -1
	}
	i := 0
	for at := target.Quantity; at < len(column); at += m.p.Quantities {
		if s := sign * column[at]; s >= least && s == s {
			t.worst[k] = keep(t.worst[k], WorstSample{column[at], first + i, corner, t.status[ends+i], t.mode[ends+i], s}, t.most)
			if len(t.worst[k]) == t.most {
				least = t.worst[k][t.most-1].score
			}
		}
		i++
	}
}

// keep inserts in order of score, sample and corner.
func keep(kept []WorstSample, w WorstSample, most int) []WorstSample {
	at, _ := slices.BinarySearchFunc(kept, w, worse)
	if at >= most {
		return kept
	}
	return slices.Insert(kept, at, w)[:min(len(kept)+1, most)]
}

func worse(a, b WorstSample) int {
	switch {
	case a.score != b.score:
		if a.score > b.score {
			return -1
		}
		return 1
	case a.Sample != b.Sample:
		return a.Sample - b.Sample
	}
	return a.Corner - b.Corner
}

// merge takes in another worker's tally.
func (t *tally) merge(o *tally) {
	for i := range t.sketches {
		t.sketches[i].merge(&o.sketches[i])
	}
	addInts(t.passes, o.passes)
	addInts(t.units, o.units)
	addInts(t.beyond, o.beyond)
	addInts(t.broken, o.broken)
	for i, f := range o.failures {
		if f.Count == 0 {
			continue
		}
		mine := &t.failures[i]
		if mine.Count == 0 || f.First < mine.First {
			mine.First = f.First
		}
		mine.Status, mine.Corner = f.Status, f.Corner
		mine.Count += f.Count
	}
	for k := range t.worst {
		for _, w := range o.worst[k] {
			t.worst[k] = keep(t.worst[k], w, t.most)
		}
	}
}

func addInts(to, from []int) {
	for i, n := range from {
		to[i] += n
	}
}
