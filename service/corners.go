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
	Run         *corners.MonteCarlo     // nil: none ran
	Samples     [][]corners.WorstSample // per target, the worst units that are told
	Shares      []*corners.Attribution  // per condition corner; nil where none was asked
	Nominal     []float64               // [any] results at typical values and conditions
	NominalEnd  evaluate.Status
	FullLoad    *CornersAnswer // of the limits that hold at full load; nil: there are none
	Basis       Basis

	parts [][]byte // of the drawn units, counted elsewhere; nil: none were
}

// Corners runs an analysis: search for the worst points, then, at their
// conditions, the linear estimate, the drawn units and the shares of the variance;
// then the search again from the worst units.
func (s *Service) Corners(ctx context.Context, p *CornersPlan) (*CornersAnswer, error) {
	return s.CornersJoined(ctx, p, nil)
}

// CornersJoined is Corners with the drawn units of all parts, as CornersPart counted
// them; without parts it draws them itself. The answer is the same.
func (s *Service) CornersJoined(ctx context.Context, p *CornersPlan, parts [][]byte) (*CornersAnswer, error) {
	a := &CornersAnswer{CornersPlan: p, parts: parts}
	err := s.run(ctx, bulk, func() error {
		if err := a.analyse(s.driver(ctx, p)); err != nil {
			return err
		}
		if p.fullLoad != nil {
			a.FullLoad = &CornersAnswer{CornersPlan: p.fullLoad}
			if err := a.FullLoad.analyse(s.driver(ctx, p.fullLoad)); err != nil {
				return err
			}
			a.Evaluations += a.FullLoad.Evaluations
		}
		s.concludeCorners(a)
		s.done.corners(a)
		return nil
	})
	if err != nil {
		return nil, err
	}
	return a, nil
}

func (a *CornersAnswer) analyse(d *driver) error {
	for _, step := range []func(*driver) error{a.searching, a.linear, a.sampling, a.attributing, a.resuming, a.sharing} {
		if err := step(d); err != nil {
			return err
		}
	}
	return nil
}

// pointsPerTask is the number of evaluations in a task of the search, for the
// meter.
const pointsPerTask = 32 // [1]

func (a *CornersAnswer) searching(d *driver) error {
	problem := a.Bound.Problem()
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
	a.chooseCorners(d.models[0])
	return nil
}

// chooseCorners takes the request's condition corners, else those of the worst
// points, else the typical conditions.
func (a *CornersAnswer) chooseCorners(model corners.Model) {
	problem := a.Bound.Problem()
	if len(a.given) > 0 {
		a.Corners = a.given
		a.CornerOf = a.worstGiven(model)
		return
	}
	a.Corners, a.CornerOf = corners.ConditionCorners(problem, a.Extremes)
	if len(a.Corners) == 0 {
		a.Corners = zeros(1, len(problem.Coordinates))
	}
	a.Corners = a.Corners[:min(len(a.Corners), MostCorners)]
	for t, k := range a.CornerOf {
		if k >= len(a.Corners) {
			a.CornerOf[t] = -1
		}
	}
}

// worstGiven returns for each target the condition corner of the request at which
// the typical unit is worst; -1 where none has a value.
func (a *CornersAnswer) worstGiven(model corners.Model) []int {
	problem := a.Bound.Problem()
	of := make([]int, len(problem.Targets))
	worst := make([]float64, len(of))
	out := make([]float64, problem.Quantities)
	for t := range of {
		of[t] = -1
	}
	for k, z := range a.given {
		model.Eval(z, out)
		for t := range of {
			v := out[problem.Targets[t].Quantity]
			if problem.Targets[t].Direction == corners.Least {
				v = -v
			}
			if v == v && (of[t] < 0 || v > worst[t]) {
				of[t], worst[t] = k, v
			}
		}
	}
	a.Evaluations += len(a.given)
	return of
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
	a.Evaluations += job.Evaluations()
	return err
}

func (a *CornersAnswer) sampling(d *driver) error {
	if !a.Methods.MonteCarlo {
		return nil
	}
	run, err := a.drawing(d)
	if err != nil {
		return err
	}
	d.meter.Expect(run.Evaluations())
	a.Run = run
	defer func() { a.Evaluations += run.Evaluations() }()
	if a.parts == nil {
		return d.do(run, unitsTask, run.Evaluations())
	}
	join, err := run.Join(a.parts)
	if err != nil {
		return err
	}
	return d.do(join, unitsTask, run.Evaluations())
}

// drawing lays out the drawing of units at the condition corners.
func (a *CornersAnswer) drawing(d *driver) (*corners.MonteCarlo, error) {
	var span func(q int) (least, greatest float64)
	if a.Search != nil {
		span = a.Search.Span
	}
	return a.monteCarlo(a.Corners, len(d.models), span)
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
	err := d.do(a.Width, pointsPerTask, a.expected.Width)
	a.Evaluations += a.Width.Evaluations()
	return err
}
