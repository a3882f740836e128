package corners

import (
	"fmt"
	"math"
	"math/bits"

	"railproof/calc/sampling"
)

const (
	attributionBlocks = 64  // whole blocks are drawn again by the bootstrap
	waveTasks         = 256 // tasks whose sums are held at once
	rowsPerTask       = 4
	leastBase         = attributionBlocks
)

// Attribution splits the variance of every quantity among the tolerances at one
// corner of the conditions, by Sobol indices over two sample matrices A and B and,
// for each coordinate, A with that column of B:
//
//	S_i  = mean(f_B (f_ABi − f_A)) / V      first order (Saltelli)
//	ST_i = mean((f_A − f_ABi)²) / 2V        total (Jansen)
//
// f centred by its mean. For an additive response both agree and sum to 1; the
// excess of the totals is interaction. Small negative first-order values are noise
// and stay.
//
// Source: A. Saltelli et al., Comput. Phys. Commun. 181, 259-270 (2010), table 2;
// M. J. W. Jansen, Comput. Phys. Commun. 117, 35-43 (1999). Checked by
// TestIshigamiIndices.
type Attribution struct {
	p       *Problem
	place   Placer
	sampler *sampling.Sampler
	at      []float64
	base    int
	rows    int // per task
	workers []*rowWorker

	centre  batch
	wave    int
	started bool
	tasks   []rowSums // of the wave
	blocks  []rowSums
}

// AttributionPlan is the base sample, a power of two, and where it is taken.
type AttributionPlan struct {
	Base    int
	Seed    uint64
	Corner  []float64 // coordinates; Random ones are ignored
	Workers int
}

// NewAttribution prepares the indices; Base × (tolerances + 2) evaluations.
func NewAttribution(p *Problem, place Placer, plan AttributionPlan) (*Attribution, error) {
	if plan.Base < leastBase || bits.OnesCount(uint(plan.Base)) != 1 {
		return nil, fmt.Errorf("corners: a base sample of %d: a power of two from %d is needed", plan.Base, leastBase)
	}
	design := sampling.Design{Method: sampling.Sobol, Seed: plan.Seed, Coordinates: 2 * place.Len(), Samples: plan.Base}
	if design.Coordinates > sampling.MaxSobolCoordinates || plan.Base < 8*sampling.Replicates {
		design.Method = sampling.Independent
	}
	sampler, err := sampling.New(design)
	if err != nil {
		return nil, fmt.Errorf("corners: attribution: %w", err)
	}
	return &Attribution{
		p: p, place: place, sampler: sampler, at: plan.Corner, base: plan.Base,
		rows: min(rowsPerTask, plan.Base/attributionBlocks), workers: make([]*rowWorker, max(1, plan.Workers)),
		blocks: make([]rowSums, attributionBlocks),
	}, nil
}

// Evaluations returns the number of evaluations.
func (a *Attribution) Evaluations() int { return a.base*(a.place.Len()+2) + 1 }

// rowSums are the sums over some rows, per quantity: n, f, f², and per coordinate
// f_B (f_AB − f_A), f_AB − f_A, (f_AB − f_A)².
type rowSums struct {
	n     []int // rows with every value
	value []float64
}

const (
	baseTerms = 2
	ownTerms  = 3
)

func (a *Attribution) terms() int { return baseTerms + ownTerms*a.place.Len() }

func (a *Attribution) newSums() rowSums {
	return rowSums{make([]int, a.p.Quantities), make([]float64, a.p.Quantities*a.terms())}
}

func (s *rowSums) clear() { clear(s.n); clear(s.value) }

func (s *rowSums) add(o *rowSums) {
	addInts(s.n, o.n)
	for i, v := range o.value {
		s.value[i] += v
	}
}

// Next implements Job: the typical value as a first centre, then wave after wave.
func (a *Attribution) Next() Work {
	if !a.started {
		a.started = true
		a.centre.reset(a.p)
		z := a.centre.add(FromSample, a.at)
		clear(z[:a.place.Len()])
		a.centre.ready()
		a.wave = -1
		return &a.centre
	}
	a.fold()
	a.wave++
	if a.Tasks() <= 0 {
		a.workers, a.tasks = nil, nil
		return nil
	}
	if a.tasks == nil {
		a.tasks = make([]rowSums, a.Tasks())
		for i := range a.tasks {
			a.tasks[i] = a.newSums()
		}
		for i := range a.blocks {
			a.blocks[i] = a.newSums()
		}
	}
	return a
}

// fold adds the wave's sums to their blocks in the order of the rows.
func (a *Attribution) fold() {
	if a.wave < 0 {
		return
	}
	for t := range a.Tasks() {
		row := (a.wave*waveTasks + t) * a.rows
		a.blocks[row*attributionBlocks/a.base].add(&a.tasks[t])
	}
}

// Tasks implements Work.
func (a *Attribution) Tasks() int { return min(waveTasks, a.base/a.rows-a.wave*waveTasks) }

// rowWorker is one worker's storage.
type rowWorker struct {
	near      Model
	cursor    *sampling.Cursor
	u, za, zb []float64
	fa, fb    []float64
	fab       []float64 // [coordinate][quantity]
}

func (a *Attribution) worker(w int) *rowWorker {
	if a.workers[w] == nil {
		k, q, d := a.place.Len(), a.p.Quantities, len(a.p.Coordinates)
		a.workers[w] = &rowWorker{nil, a.sampler.Cursor(), make([]float64, 2*k), make([]float64, d), make([]float64, d), make([]float64, q), make([]float64, q), make([]float64, k*q)}
	}
	return a.workers[w]
}

// Run implements Work.
func (a *Attribution) Run(task, worker int, m Model) {
	w, s := a.worker(worker), &a.tasks[task]
	if w.near == nil {
		w.near = modelsNear(m, [][]float64{a.at})[0]
	}
	s.clear()
	first := (a.wave*waveTasks + task) * a.rows
	for row := first; row < first+a.rows; row++ {
		w.evaluate(a, row, w.near)
		w.addTo(a, s)
	}
}

func (w *rowWorker) evaluate(a *Attribution, row int, m Model) {
	k, q := a.place.Len(), a.p.Quantities
	w.cursor.Point(row, w.u)
	copy(w.za, a.at)
	copy(w.zb, a.at)
	a.place.Place(w.u[:k], w.za)
	a.place.Place(w.u[k:], w.zb)
	m.Eval(w.za, w.fa)
	m.Eval(w.zb, w.fb)
	for i := range k {
		own := w.za[i]
		w.za[i] = w.zb[i]
		m.Eval(w.za, w.fab[i*q:][:q])
		w.za[i] = own
	}
}

func (w *rowWorker) addTo(a *Attribution, s *rowSums) {
	k, quantities, terms := a.place.Len(), a.p.Quantities, a.terms()
	for q := range quantities {
		centre := a.centre.result(0)[q]
		if centre != centre {
			centre = 0
		}
		fa, fb := w.fa[q]-centre, w.fb[q]-centre
		whole := fa + fb
		for i := range k {
			whole += w.fab[i*quantities+q]
		}
		if math.IsNaN(whole) || math.IsInf(whole, 0) {
			continue
		}
		s.n[q]++
		v := s.value[q*terms:][:terms]
		v[0] += fa + fb
		v[1] += fa*fa + fb*fb
		for i := range k {
			d := w.fab[i*quantities+q] - centre - fa
			v[baseTerms+ownTerms*i] += fb * d
			v[baseTerms+ownTerms*i+1] += d
			v[baseTerms+ownTerms*i+2] += d * d
		}
	}
}
