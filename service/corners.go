package service

import (
	"context"

	"railproof/calc/corners"
	"railproof/calc/evaluate"
)

// CornersAnswer is the analysis of a plan.
type CornersAnswer struct {
	*CornersPlan
	Status      evaluate.Status // OK, or NotConverged where something has no answer
	Verdict     CornersVerdict
	Evaluations int
	Search      *corners.Search // nil: none ran
	Extremes    []corners.Extreme
	Width       *corners.WidthJob // nil: none ran
	Corners     [][]float64       // condition corners
	CornerOf    []int             // of each target; -1: none
	Linear      []corners.RootSumSquare
	Run         *corners.MonteCarlo    // nil: none ran
	Shares      []*corners.Attribution // per condition corner; nil where none was asked
	Nominal     []float64              // [any] results at typical values and conditions
	NominalEnd  evaluate.Status
	Basis       Basis
}

// Corners runs an analysis: search for the worst points, then, at their
// conditions, the linear estimate, the drawn units and the shares of the variance;
// then the search again from the worst units.
func (s *Service) Corners(ctx context.Context, p *CornersPlan) (*CornersAnswer, error) {
	a := &CornersAnswer{CornersPlan: p}
	err := s.run(ctx, bulk, func() error {
		d := &driver{ctx: ctx, models: make([]corners.Model, s.workers), meter: MeterOf(ctx)}
		for i := range d.models {
			d.models[i] = p.Bound.Model()
		}
		steps := []func(*driver) error{a.searching, a.linear, a.sampling, a.attributing, a.resuming, a.sharing}
		for _, step := range steps {
			if err := step(d); err != nil {
				return err
			}
		}
		s.concludeCorners(a, d.models[0])
		s.done.corners(a)
		return nil
	})
	if err != nil {
		return nil, err
	}
	return a, nil
}

// pointsPerTask is the number of evaluations in a task of the search, for the
// meter.
const pointsPerTask = 32 // [1]

func (a *CornersAnswer) searching(d *driver) error {
	problem := a.Bound.Problem()
	a.CornerOf = make([]int, len(problem.Targets))
	if a.search {
		d.meter.Expect(a.expected.Search)
		a.Search = corners.NewSearch(problem)
		if err := d.do(a.Search, pointsPerTask, a.expected.Search); err != nil {
			return err
		}
		a.Extremes = a.Search.Extremes()
		a.Evaluations += a.Search.Evaluations()
		a.Nominal, a.NominalEnd = a.Search.Nominal()
	} else {
		a.Nominal = make([]float64, problem.Quantities)
		a.NominalEnd, _ = d.models[0].Eval(make([]float64, len(problem.Coordinates)), a.Nominal)
		a.Evaluations++
	}
	a.chooseCorners(len(problem.Coordinates))
	return nil
}

// chooseCorners takes the request's condition corners, else those of the worst
// points, else the typical conditions.
func (a *CornersAnswer) chooseCorners(dimensions int) {
	if len(a.given) > 0 {
		a.Corners = a.given
		return
	}
	a.Corners, a.CornerOf = corners.ConditionCorners(a.Bound.Problem(), a.Extremes)
	if len(a.Corners) == 0 {
		a.Corners = zeros(1, dimensions)
	}
	a.Corners = a.Corners[:min(len(a.Corners), MostCorners)]
	for t, k := range a.CornerOf {
		if k >= len(a.Corners) {
			a.CornerOf[t] = -1
		}
	}
}

// Corner returns the condition corner that is the worst of a target, the first
// where none is.
func (a *CornersAnswer) Corner(target int) int { return max(0, a.CornerOf[target]) }

func (a *CornersAnswer) linear(d *driver) error {
	if !a.Methods.RootSumSquare {
		return nil
	}
	d.meter.Expect(a.expected.Linear)
	at := make([][]float64, len(a.CornerOf))
	for t := range at {
		at[t] = a.Corners[a.Corner(t)]
	}
	job := corners.NewLinear(a.Bound.Problem(), at)
	err := d.do(job, pointsPerTask, a.expected.Linear)
	a.Linear = job.Results()
	return err
}

func (a *CornersAnswer) sampling(d *driver) error {
	if !a.Methods.MonteCarlo {
		return nil
	}
	var span func(q int) (least, greatest float64)
	if a.Search != nil {
		span = a.Search.Span
	}
	run, err := a.monteCarlo(a.Corners, len(d.models), span)
	if err != nil {
		return err
	}
	d.meter.Expect(run.Evaluations())
	a.Run = run
	a.Evaluations += run.Evaluations()
	return d.do(run, unitsTask, run.Evaluations())
}

// unitsTask is the number of evaluations in a task of the drawn units, for the
// meter.
const unitsTask = 64 // [1]

func (a *CornersAnswer) attributing(d *driver) error {
	if !a.Methods.Attribution || a.Bound.Spreads().Len() == 0 {
		return nil
	}
	a.Shares = make([]*corners.Attribution, len(a.Corners))
	d.meter.Expect(len(a.Corners) * a.perCorner)
	for k := range a.Corners {
		job, err := a.attribution(a.Corners[k], len(d.models))
		if err != nil {
			return err
		}
		if err := d.do(job, a.perCorner/a.Base, a.perCorner); err != nil {
			return err
		}
		a.Shares[k] = job
		a.Evaluations += job.Evaluations()
	}
	return nil
}

// resuming lets the search go on from the worst units, so that no unit is worse
// than the worst point.
func (a *CornersAnswer) resuming(d *driver) error {
	if a.Search == nil || a.Run == nil {
		return nil
	}
	d.meter.Expect(a.expected.Resume)
	before := a.Search.Evaluations()
	a.Search.Resume(a.Run.WorstPoints())
	if err := d.do(a.Search, pointsPerTask, a.expected.Resume); err != nil {
		return err
	}
	a.Evaluations += a.Search.Evaluations() - before
	a.Extremes = a.Search.Extremes()
	return nil
}

// sharing splits each worst case among the variables.
func (a *CornersAnswer) sharing(d *driver) error {
	if !a.Methods.ExtremeValue {
		return nil
	}
	d.meter.Expect(a.expected.Width)
	a.Width = corners.NewWidth(a.Bound.Problem(), a.Extremes)
	a.Evaluations += a.expected.Width
	return d.do(a.Width, pointsPerTask, a.expected.Width)
}
