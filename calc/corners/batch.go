package corners

import (
	"railproof/calc/evaluate"
	"railproof/calc/switched"
)

// pointsPerTask keeps a task below a millisecond for evaluations up to 30 us.
const pointsPerTask = 32

// Origin tells how a point came to be tried.
type Origin uint8

const (
	FromNominal Origin = iota
	FromConditionCorner
	FromVertex
	FromSearch
	FromSample
)

// batch is a list of points to evaluate; its storage is reused from step to step.
type batch struct {
	dims, quantities int
	z, out           []float64
	status           []evaluate.Status
	mode             []switched.Mode
	origin           []Origin
}

func (b *batch) reset(p *Problem) {
	b.dims, b.quantities = len(p.Coordinates), p.Quantities
	b.z, b.origin = b.z[:0], b.origin[:0]
}

// add appends a copy of the point and returns the copy.
func (b *batch) add(from Origin, z []float64) []float64 {
	b.z = append(b.z, z...)
	b.origin = append(b.origin, from)
	return b.z[len(b.z)-b.dims:]
}

// moved appends the point with one coordinate changed.
func (b *batch) moved(z []float64, coordinate int, to float64) {
	b.add(FromSearch, z)[coordinate] = to
}

// ready makes room for the results.
func (b *batch) ready() {
	n := len(b.origin)
	if need := n * b.quantities; cap(b.out) < need {
		b.out = make([]float64, need)
	}
	if cap(b.status) < n {
		b.status, b.mode = make([]evaluate.Status, n), make([]switched.Mode, n)
	}
	b.out, b.status, b.mode = b.out[:n*b.quantities], b.status[:n], b.mode[:n]
}

func (b *batch) len() int               { return len(b.origin) }
func (b *batch) point(i int) []float64  { return b.z[i*b.dims:][:b.dims] }
func (b *batch) result(i int) []float64 { return b.out[i*b.quantities:][:b.quantities] }

func (b *batch) score(i int, t *Target) float64 { return t.score(b.out[i*b.quantities+t.Quantity]) }

// Tasks and Run make a batch a Work.
func (b *batch) Tasks() int { return (b.len() + pointsPerTask - 1) / pointsPerTask }

func (b *batch) Run(task, _ int, m Model) {
	for i := task * pointsPerTask; i < min(b.len(), (task+1)*pointsPerTask); i++ {
		b.status[i], b.mode[i] = m.Eval(b.point(i), b.result(i))
	}
}
