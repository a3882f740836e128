package service

import (
	"context"

	"railproof/calc/corners"
)

const (
	partEvaluations = 250_000 // [1] of drawn units in a part: some tenths of a second
	mostParts       = 64
	guessedCorners  = 4 // condition corners where the search is yet to find them
)

// Parts returns into how many parts the drawn units of an analysis are worth
// splitting, and about how many evaluations all of it takes.
func (p *CornersPlan) Parts() (parts, evaluations int) {
	at := len(p.given)
	if at == 0 {
		at = guessedCorners
	}
	evaluations = p.expected.Search + p.expected.Linear + p.expected.Resume + p.expected.Width
	if p.Methods.Attribution {
		evaluations += at * p.perCorner
	}
	if p.fullLoad != nil {
		_, more := p.fullLoad.Parts()
		evaluations += more
	}
	if !p.Methods.MonteCarlo {
		return 1, evaluations
	}
	drawn := at * p.Sampling.Samples
	return min(mostParts, drawn/partEvaluations), evaluations + drawn
}

// CornersPart draws the units of one part, counted from 0, and returns their counts
// for CornersJoined. The search before it is repeated: it is short, and decides where
// units are evaluated.
func (s *Service) CornersPart(ctx context.Context, p *CornersPlan, part, parts int) ([]byte, error) {
	a := &CornersAnswer{CornersPlan: p}
	var counts []byte
	err := s.run(ctx, bulk, func() error {
		d := s.driver(ctx, p)
		d.meter = new(Meter) // the search is counted once, where the parts are joined
		if err := a.searching(d); err != nil {
			return err
		}
		d.meter = MeterOf(ctx)
		run, err := a.drawing(d)
		if err != nil {
			return err
		}
		job := run.Part(part, parts)
		n := run.Evaluations() / parts
		if err := d.do(job, unitsTask, n); err != nil {
			return err
		}
		s.done.Evaluations.Add(int64(n))
		counts = job.Counts()
		return nil
	})
	return counts, err
}

// driver makes a driver with a model for each worker.
func (s *Service) driver(ctx context.Context, p *CornersPlan) *driver {
	d := &driver{ctx: ctx, turns: s.cores, models: make([]corners.Model, s.workers), meter: MeterOf(ctx)}
	for i := range d.models {
		d.models[i] = p.Bound.Model()
	}
	return d
}
