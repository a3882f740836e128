package corners

import (
	"fmt"
	"math"

	"railproof/calc/evaluate"
	"railproof/calc/sampling"
	"railproof/calc/switched"
)

// Placer turns a point of the unit cube into the Random coordinates that follow
// their distributions.
type Placer interface {
	Len() int
	Place(u, z []float64)
}

// Limit bounds a quantity; NaN where there is none.
type Limit struct {
	Quantity int
	Min, Max float64 // [any]
}

// Plan is what a Monte Carlo run does. A sample is one built unit: its tolerances
// are drawn once and it is evaluated at every corner.
type Plan struct {
	Sampling sampling.Design // Coordinates is filled in
	First    int             // number of the first sample; independent samples only
	Corners  [][]float64     // coordinates at which every unit is evaluated; Random ones are ignored
	Limits   []Limit
	Worst    int // samples kept per target
	Workers  int
	// Span gives the range of a quantity known beforehand, such as Search.Span;
	// nil: from the pilot alone.
	Span func(q int) (least, greatest float64)
}

const (
	pilotSamples   = 512
	pilotMargin    = 0.5       // of the pilot's range, added on each side
	greatestBins   = 2048      // [1] per sketch
	leastBins      = 64        // [1]
	sketchBytes    = 6 << 20   // for the counts of one worker
	hardlyVaries   = 1e-6      // of the span
	taskEvaluates  = 64        // [1] below a millisecond for evaluations up to 15 us
	spanMargin     = 1.0 / 256 // of the span, so that its ends fall inside the grid
	countBytes     = 4
	MostUnits      = 1 << 24 // [1] the sums are exact up to here
	greatestWorst  = 1000    // [1]
	greatestCorner = 64      // [1]
)

// MonteCarlo draws built units and keeps counts, exact sums and the worst samples.
type MonteCarlo struct {
	p       *Problem
	plan    Plan
	place   Placer
	sampler *sampling.Sampler
	bins    int
	grids   []grid // [corner*quantities + quantity]
	workers []*tally
	pilot   batch
	again   batch // the worst samples
	stage   int
	total   *tally
}

// NewMonteCarlo lays out a run. The problem's Random coordinates come first, in the
// order of the placer.
func NewMonteCarlo(p *Problem, place Placer, plan Plan) (*MonteCarlo, error) {
	plan.Sampling.Coordinates = place.Len()
	for i := range p.Coordinates {
		if (p.Coordinates[i].Kind == Random) != (i < place.Len()) {
			panic("corners: random coordinates do not come first")
		}
	}
	for _, c := range plan.Corners {
		if len(c) != len(p.Coordinates) {
			panic("corners: a corner of another length than the box")
		}
	}
	if plan.First > 0 {
		if plan.Sampling.Method != sampling.Independent {
			return nil, fmt.Errorf("corners: only independent samples can start at a number other than 0")
		}
		plan.Sampling.Samples += plan.First
	}
	sampler, err := sampling.New(plan.Sampling)
	if err != nil {
		return nil, fmt.Errorf("corners: %w", err)
	}
	m := &MonteCarlo{p: p, plan: plan, place: place, sampler: sampler, bins: greatestBins, workers: make([]*tally, max(1, plan.Workers))}
	if m.Units() > MostUnits {
		return nil, fmt.Errorf("corners: %d units: at most %d are possible", m.Units(), MostUnits)
	}
	if n := len(plan.Corners); n < 1 || n > greatestCorner {
		return nil, fmt.Errorf("corners: %d condition corners: between 1 and %d are possible", n, greatestCorner)
	}
	if plan.Worst > greatestWorst {
		return nil, fmt.Errorf("corners: %d worst samples: at most %d are possible", plan.Worst, greatestWorst)
	}
	cells := sampler.Replicates() * len(plan.Corners) * p.Quantities
	for m.bins > leastBins && cells*m.bins*countBytes > sketchBytes {
		m.bins /= 2
	}
	if cells*m.bins*countBytes > sketchBytes {
		return nil, fmt.Errorf("corners: %d quantities at %d condition corners in %d replicates need %d sketches: at most %d are possible",
			p.Quantities, len(plan.Corners), sampler.Replicates(), cells, sketchBytes/countBytes/leastBins)
	}
	return m, nil
}

// Units returns the number of units that are drawn.
func (m *MonteCarlo) Units() int { return m.sampler.Samples() - m.plan.First }

// Evaluations returns the number of evaluations of the run, the pilot's included.
func (m *MonteCarlo) Evaluations() int {
	return (m.Units()+pilotSamples)*len(m.plan.Corners) + m.again.len()
}

// Next implements Job: a pilot that sets the grids, the run, and the worst samples once
// more.
func (m *MonteCarlo) Next() Work {
	m.stage++
	switch m.stage {
	case 1:
		m.pilot.reset(m.p)
		m.proposePilot()
		m.pilot.ready()
		return &m.pilot
	case 2:
		m.setGrids()
		m.pilot = batch{}
		return m
	case 3:
		m.collect(m.workers)
		m.workers = nil
		return m.worstAgain()
	case 4:
		m.settleWorst()
	}
	return nil
}

func (m *MonteCarlo) collect(tallies []*tally) {
	m.total = m.newTally()
	for _, t := range tallies {
		if t != nil {
			m.total.merge(t)
		}
	}
}

// worstAgain evaluates the worst samples by the Model itself, so that each has the
// figures that its point alone gives.
func (m *MonteCarlo) worstAgain() Work {
	m.again.reset(m.p)
	for _, list := range m.total.worst {
		for _, w := range list {
			m.again.add(FromSample, m.Sample(w.Sample, w.Corner))
		}
	}
	m.again.ready()
	return &m.again
}

func (m *MonteCarlo) settleWorst() {
	i := 0
	for k, list := range m.total.worst {
		for j := range list {
			w := &list[j]
			w.Value, w.Status, w.Mode = m.again.result(i)[m.p.Targets[k].Quantity], m.again.status[i], m.again.mode[i]
			i++
		}
	}
}

// pilotSeed keeps the pilot's units apart from the run's.
const pilotSeed = 0x5bd1e995

func (m *MonteCarlo) proposePilot() {
	u := make([]float64, m.place.Len())
	for k := range pilotSamples {
		key := sampling.Key(m.plan.Sampling.Seed+pilotSeed, uint64(k))
		for i := range u {
			u[i] = sampling.Uniform(key, uint64(i))
		}
		for _, c := range m.plan.Corners {
			m.place.Place(u, m.pilot.add(FromSample, c))
		}
	}
}

func (m *MonteCarlo) setGrids() {
	corners := len(m.plan.Corners)
	m.grids = make([]grid, corners*m.p.Quantities)
	for c := range corners {
		for q := range m.p.Quantities {
			lo, hi := math.Inf(1), math.Inf(-1)
			for i := c; i < m.pilot.len(); i += corners {
				if v := m.pilot.result(i)[q]; v-v == 0 {
					lo, hi = min(lo, v), max(hi, v)
				}
			}
			m.grids[c*m.p.Quantities+q] = m.gridFor(q, lo, hi)
		}
	}
}

// gridFor lays a grid over the pilot's range with a margin, no wider than what is
// known to be possible; over all of that where the pilot hardly varies, since then
// it says little of what the run will meet.
func (m *MonteCarlo) gridFor(q int, lo, hi float64) grid {
	if lo > hi { // the pilot found no value
		lo, hi = 0, 0
	}
	margin := pilotMargin * (hi - lo)
	from, to := lo-margin, hi+margin
	if m.plan.Span != nil {
		if least, greatest := m.plan.Span(q); least <= greatest {
			edge := spanMargin * (greatest - least)
			least, greatest = least-edge, greatest+edge
			if hi-lo < hardlyVaries*(greatest-least) {
				from, to = least, greatest
			} else {
				from, to = max(from, min(lo, least)), min(to, max(hi, greatest))
			}
		}
	}
	return newGrid(from, to, m.bins)
}

func (m *MonteCarlo) unitsPerTask() int { return max(1, taskEvaluates/len(m.plan.Corners)) }

// Tasks implements Work.
func (m *MonteCarlo) Tasks() int {
	n := m.unitsPerTask()
	return (m.Units() + n - 1) / n
}

// Run implements Work.
func (m *MonteCarlo) Run(task, worker int, model Model) {
	w := m.workers[worker]
	if w == nil {
		w = m.newTally()
		m.workers[worker] = w
	}
	n := m.unitsPerTask()
	first := task * n
	for first < min(m.Units(), (task+1)*n) {
		// a task stops at the end of a replicate
		last := min(m.Units(), (task+1)*n, (first/m.sampler.PerReplicate()+1)*m.sampler.PerReplicate())
		w.run(m, model, first, last)
		first = last
	}
}

// Sample returns the coordinates of one sample at one corner, as the run drew it.
func (m *MonteCarlo) Sample(k, corner int) []float64 {
	u := make([]float64, m.place.Len())
	m.sampler.Cursor().Point(k, u)
	z := append([]float64(nil), m.plan.Corners[corner]...)
	m.place.Place(u, z)
	return z
}

// WorstSample is one of the samples at which a target was worst.
type WorstSample struct {
	Value          float64 // [any]
	Sample, Corner int
	Status         evaluate.Status
	Mode           switched.Mode
	score          float64
}

// FailureCount is how often samples failed in one way at one corner.
type FailureCount struct {
	Status        evaluate.Status
	Corner, Count int
	First         int // the least number of a sample that did
}
