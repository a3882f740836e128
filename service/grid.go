package service

import (
	"context"
	"math"

	"railproof/calc/caution"
	"railproof/calc/evaluate"
	"railproof/calc/quantity"
	"railproof/calc/stage"
	"railproof/calc/switched"
)

// GridRequest asks for figures over every combination of three axes.
type GridRequest struct {
	Design     Design
	Input      []float64   // [V] slowest
	Load       []float64   // [A]
	Ambient    []float64   // [degC] fastest
	Base       stage.Point // everything else of the points
	Quantities []quantity.ID
}

// GridAnswer holds one column per quantity that applies, an entry per cell;
// NaN in cells without figures.
type GridAnswer struct {
	Status     evaluate.Status // the worst of all
	Cells      []evaluate.Status
	Modes      []switched.Mode
	Quantities []quantity.ID
	Columns    [][]float64 // [any] one per quantity
	Basis      Basis
}

// gridChunk is the number of cells between two looks at the context.
const gridChunk = 64 // [1]

// Cell returns the point of a cell.
func (r *GridRequest) Cell(i int) stage.Point {
	p := r.Base
	p.AmbientDegC = r.Ambient[i%len(r.Ambient)]
	i /= len(r.Ambient)
	p.Load.Current = r.Load[i%len(r.Load)]
	p.Input = r.Input[i/len(r.Load)]
	return p
}

// Count returns the number of cells.
func (r *GridRequest) Count() int { return len(r.Input) * len(r.Load) * len(r.Ambient) }

// LossesGrid evaluates the stage at every cell, on all workers.
func (s *Service) LossesGrid(ctx context.Context, r *GridRequest) (*GridAnswer, error) {
	n := r.Count()
	a := &GridAnswer{Cells: make([]evaluate.Status, n), Modes: make([]switched.Mode, n), Columns: make([][]float64, len(r.Quantities))}
	for i := range a.Columns {
		a.Columns[i] = make([]float64, n)
	}
	err := s.run(ctx, bulk, func() error {
		sketches := make([]gridSketch, (n+gridChunk-1)/gridChunk)
		err := inChunks(ctx, s.cores, n, gridChunk, s.workers,
			func() *evaluate.Evaluator { return s.evaluator(r.Design.Stage) }, s.release,
			func(e *evaluate.Evaluator, from, to int) {
				r.chunk(a, e, &sketches[from/gridChunk], from, to)
			})
		if err != nil {
			return err
		}
		s.conclude(r, a, sketches)
		s.done.count(a.Cells...)
		return nil
	})
	if err != nil {
		return nil, err
	}
	a.dropInapplicable(r.Quantities)
	return a, nil
}

// gridSketch is what a chunk of cells leaves for cautions and warnings.
type gridSketch struct {
	seen  caution.Seen
	worst evaluate.Status
	cell  int // first cell with figures; -1: none
	warn  warnings
}

// chunk evaluates cells and stores them by index.
func (r *GridRequest) chunk(a *GridAnswer, e *evaluate.Evaluator, k *gridSketch, from, to int) {
	var out evaluate.Result
	k.cell, k.worst = -1, evaluate.OK
	for i := from; i < to; i++ {
		p := r.Cell(i)
		e.Eval(&p, &out)
		demandFinite(&out)
		a.Cells[i], a.Modes[i] = out.Status, out.Conduction()
		for j, id := range r.Quantities {
			a.Columns[j][i] = out.Quantities[id]
		}
		k.worst = worse(k.worst, out.Status)
		k.seen.Add("/grid", r.Design.Stage, &p, &out)
		if out.Status.Figures() {
			k.warn.scale(&r.Design, &p, &out)
			if k.cell < 0 {
				k.cell = i
			}
		}
	}
}

// conclude merges the sketches in their order and says what the answer rests on.
func (s *Service) conclude(r *GridRequest, a *GridAnswer, sketches []gridSketch) {
	e := s.evaluator(r.Design.Stage)
	defer s.release(e)
	var warn warnings
	warn.unused(&r.Design)
	warn.typicalControl(&r.Design, "/grid", &r.Base.Control)
	warn.heldParts("/grid", &r.Base)
	var base *basis
	var seen caution.Seen
	a.Status = evaluate.OK
	for i := range sketches {
		k := &sketches[i]
		a.Status = worse(a.Status, k.worst)
		seen.Merge(&k.seen)
		for _, w := range k.warn.list {
			warn.keep(w)
		}
		if base == nil && k.cell >= 0 {
			p := r.Cell(k.cell)
			base = &basis{&p, new(evaluate.Result)}
			e.Eval(&p, base.result)
		}
	}
	a.Basis = Basis{s.assumptions(&r.Design, e, base), caution.Of(r.Design.Stage, r.Design.At, r.Design.Variables, &seen), warn.list}
}

// dropInapplicable removes the columns of quantities that the stage does not have.
func (a *GridAnswer) dropInapplicable(asked []quantity.ID) {
	kept := a.Columns[:0]
	for j, column := range a.Columns {
		for i := range column {
			if !math.IsNaN(column[i]) {
				kept = append(kept, column)
				a.Quantities = append(a.Quantities, asked[j])
				break
			}
		}
	}
	a.Columns = kept
}

// Failure tells why a cell has no row, "" for one that has.
func (a *GridAnswer) Failure(i int) string {
	if !a.Cells[i].Figures() {
		return "no figures: " + a.Cells[i].String()
	}
	for j, column := range a.Columns {
		if math.IsNaN(column[i]) {
			return a.Quantities[j].Key() + " has no value here"
		}
	}
	return ""
}
