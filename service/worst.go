package service

import (
	"context"
	"math"
	"slices"

	"railproof/calc/caution"
	"railproof/calc/corners"
	"railproof/calc/evaluate"
	"railproof/calc/loop"
	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/rules"
	"railproof/calc/stage"
	"railproof/calc/transient"
)

// passKind tells by what means a pass looks for worst points.
type passKind uint8

const (
	electrical passKind = iota // steady state and losses: the full search
	ofLoop                     // a loop analysis at every point: vertices by sensitivity
	ofStep                     // a load step at every point: the same
)

func kindOf(id quantity.ID) passKind {
	switch info, _ := quantity.Of(id); info.Group {
	case quantity.Loop:
		return ofLoop
	case quantity.Transient:
		return ofStep
	}
	return electrical
}

// worstPass looks for the extremes of some quantities over a box.
type worstPass struct {
	kind     passKind
	full     bool // the load stays at its greatest
	by       rules.Search
	bound    *corners.Design
	ids      []quantity.ID // results of the model
	found    []corners.Extreme
	blind    []bool // per target: a working point had no value
	bears    []bool // per coordinate, of a search by vertices: it moves a target
	failures []corners.Failure
}

// WorstCorner is where a worst value was found.
type WorstCorner struct{ Point stage.Point }

// worstCase is everything that rules may know of a design.
type worstCase struct {
	rules.Case
	Corners []WorstCorner
	Nominal evaluate.Result
	seen    caution.Seen
	passes  []*worstPass
}

// worstRequest asks for the worst case of a design.
type worstRequest struct {
	design        *Design
	at            string // pointer of the conditions, or of the requirement that they are taken from
	conditions    stage.Conditions
	requirementAt string
	requirement   *stage.Requirement
	demand        rules.Demand
	like          *worstCase // of the same design with another part in one role; nil: none
	role          string     // pointer of that role
}

// worst finds what the demand asks for on the given number of workers.
func (s *Service) worst(ctx context.Context, r *worstRequest, workers int) (*worstCase, error) {
	d := r.design
	w := &worstCase{}
	w.StageAt, w.Stage, w.Spreads, w.Assumed = d.At, d.Stage, d.Variables, d.Assumed
	w.RequirementAt, w.Requirement = r.requirementAt, r.requirement
	w.Extremes, w.FullLoad, w.Absent = map[quantity.ID]rules.Extreme{}, map[quantity.ID]rules.Extreme{}, map[quantity.ID][]string{}
	w.absences(r)
	w.heldOutput(r)
	w.Uncovered = uncovered(r)
	step := newLoadStep(r.requirement)
	s.nominal(r, w, step)
	for _, p := range r.layOut(w.Absent, step) {
		models := make([]corners.Model, workers)
		for i := range models {
			models[i] = p.bound.Model()
		}
		drive := &driver{ctx: ctx, turns: s.cores, models: models, meter: new(Meter)}
		var err error
		if p.kind == electrical {
			err = p.search(drive, r, w.passes)
		} else {
			err = p.vertices(drive, r)
		}
		if err != nil {
			return nil, err
		}
		w.passes = append(w.passes, p)
		s.gather(r, w, p)
	}
	return w, nil
}

// absences tells of the quantities that this stage cannot have what they lack.
func (w *worstCase) absences(r *worstRequest) {
	lifeless := func(first quantity.ID, banks []parts.Capacitor) {
		for k := range banks {
			if banks[k].Kind != parts.AluminiumElectrolytic {
				w.Absent[first+quantity.ID(k)] = []string{"a life model: there is one for aluminium electrolytic capacitors only"}
			}
		}
	}
	lifeless(quantity.OutputCapacitorLife, w.Stage.OutputCapacitors)
	lifeless(quantity.InputCapacitorLife, w.Stage.InputCapacitors)
	if loop.Present(w.Stage) {
		return
	}
	var lacks []string
	for _, part := range []struct {
		name    string
		present bool
	}{{"/modulator", w.Stage.Modulator.Present}, {"/compensator", w.Stage.Compensator.Present}, {"/feedback", w.Stage.Feedback.Present}} {
		if !part.present {
			lacks = append(lacks, r.design.At+part.name)
		}
	}
	for id := range quantity.Count {
		if kindOf(id) != electrical {
			w.Absent[id] = lacks
		}
	}
}

// nominal evaluates the typical point.
func (s *Service) nominal(r *worstRequest, w *worstCase, step *transient.Demand) {
	point := r.conditions.Typical()
	e := s.evaluator(r.design.Stage)
	defer s.release(e)
	e.Eval(&point, &w.Nominal)
	demandFinite(&w.Nominal)
	extend := extensionFor(r.demand.Nominal, w.Absent, step)
	q := w.Nominal.Quantities
	if w.Nominal.Status.Figures() && extend != nil {
		extended := w.Nominal
		extend(e, &point, &extended)
		q = extended.Quantities
	}
	w.Case.Nominal = &q
	w.seen.AddConditions(r.at, r.design.Stage, &r.conditions)
	w.seen.Add(r.at, r.design.Stage, &point, &w.Nominal)
	if !w.Nominal.Status.OK() {
		w.Statuses = append(w.Statuses, rules.PointStatus{Status: w.Nominal.Status, Corner: w.corner(point)})
	}
	if !w.Nominal.Status.Figures() {
		return
	}
	under := underAssumed(e, &point, r.design.Assumed, func(field string) corners.Extension {
		if !shapesLoop(field) {
			return nil
		}
		return extend
	})
	w.NominalUnder = map[quantity.ID]rules.Under{}
	for _, id := range r.demand.Nominal {
		w.NominalUnder[id] = underOf(under, r.design.At, id, q[id])
		w.NominalUses = union(w.NominalUses, s.tablesBehind(r.design, &point, &w.Nominal, id))
	}
}

// layOut makes the passes that the demand needs.
func (r *worstRequest) layOut(absent map[quantity.ID][]string, step *transient.Demand) []*worstPass {
	var passes []*worstPass
	for _, part := range []struct {
		full            bool
		least, greatest []quantity.ID
	}{{false, r.demand.Least, r.demand.Greatest}, {true, r.demand.FullLoadLeast, r.demand.FullLoadGreatest}} {
		for kind := electrical; kind <= ofStep; kind++ {
			p := &worstPass{kind: kind, full: part.full}
			var targets []corners.Target
			for i, list := range [][]quantity.ID{part.least, part.greatest} {
				for _, id := range list {
					if kindOf(id) != kind || absent[id] != nil || kind == ofStep && step == nil {
						continue
					}
					direction := corners.Least
					if i == 1 {
						direction = corners.Greatest
					}
					targets = append(targets, corners.Target{Quantity: p.index(id), Direction: direction})
				}
			}
			if len(targets) > 0 {
				p.bind(r, targets, step)
				passes = append(passes, p)
			}
		}
	}
	return passes
}

// index returns the place of a quantity among the model's results.
func (p *worstPass) index(id quantity.ID) int {
	for i, known := range p.ids {
		if known == id {
			return i
		}
	}
	p.ids = append(p.ids, id)
	return len(p.ids) - 1
}

func (p *worstPass) bind(r *worstRequest, targets []corners.Target, step *transient.Demand) {
	c := r.conditions
	if p.full || p.kind == ofStep { // a load step has a load of its own
		c.LoadCurrent = held(c.LoadCurrent.Max)
		c.LoadConductance = held(c.LoadConductance.Max)
	}
	o := corners.DesignOptions{Quantities: p.ids}
	if p.kind != electrical {
		ids := p.ids
		o.Extend = func() corners.Extension { return extensionFor(ids, nil, step) }
	}
	bound, err := corners.NewDesign(r.design.Stage, r.design.Variables, &c, o)
	if err != nil {
		panic("service: spreads that were checked are refused: " + err.Error())
	}
	bound.Problem().Targets = targets
	p.bound = bound
	p.blind, p.bears = make([]bool, len(targets)), make([]bool, len(bound.Problem().Coordinates))
}

func held(v float64) stage.Range { return stage.Range{Min: v, Typ: v, Max: v} }

// extensionFor returns what computes the loop and load-step quantities of a list;
// nil where it has none.
func extensionFor(ids []quantity.ID, absent map[quantity.ID][]string, step *transient.Demand) corners.Extension {
	var list []corners.Extension
	var wanted [ofStep + 1]bool
	for _, id := range ids {
		if absent[id] == nil {
			wanted[kindOf(id)] = true
		}
	}
	if wanted[ofLoop] {
		list = append(list, loopExtension(ids)())
	}
	if wanted[ofStep] && step != nil {
		list = append(list, stepExtension(step))
	}
	if len(list) == 0 {
		return nil
	}
	return func(e *evaluate.Evaluator, p *stage.Point, r *evaluate.Result) {
		for _, extend := range list {
			extend(e, p, r)
		}
	}
}

// search runs the full search or, where the worst case of a like design or of the
// whole range of loads is known, goes on from its points.
func (p *worstPass) search(d *driver, r *worstRequest, before []*worstPass) error {
	problem := p.bound.Problem()
	seeds := r.seeds(p)
	if seeds == nil && p.full {
		seeds = p.translated(before, func(other *worstPass) bool { return other.kind == electrical && !other.full })
	}
	search := corners.NewSearch(problem)
	if p.by = rules.InBox; seeds != nil {
		search, p.by = corners.NewSeeded(problem, seeds), rules.InBoxSeeded
	}
	if err := d.do(search, pointsPerTask, 0); err != nil {
		return err
	}
	p.found, p.failures = search.Extremes(), search.Failures()
	return nil
}

// seeds returns the worst points of the like design's pass in this pass's
// coordinates; nil without one.
func (r *worstRequest) seeds(p *worstPass) [][]float64 {
	if r.like == nil {
		return nil
	}
	return p.translated(r.like.passes, func(other *worstPass) bool { return other.kind == p.kind && other.full == p.full })
}

// translated returns the worst points of the first pass that fits, in this pass's
// coordinates.
func (p *worstPass) translated(passes []*worstPass, fits func(*worstPass) bool) [][]float64 {
	i := slices.IndexFunc(passes, fits)
	if i < 0 {
		return nil
	}
	from := passes[i].coordinates()
	var seeds [][]float64
	for _, x := range passes[i].found {
		if x.At != nil {
			seeds = append(seeds, p.translate(x.At, from))
		}
	}
	return seeds
}

// coordinates returns the coordinate of every pointer that has one.
func (p *worstPass) coordinates() map[string]int {
	at := map[string]int{}
	for i := range p.bound.Problem().Coordinates {
		for _, pointer := range p.bound.Pointers(i) {
			at[pointer] = i
		}
	}
	return at
}

// translate returns a point of another box here: what both have at its place, the
// rest typical.
func (p *worstPass) translate(z []float64, from map[string]int) []float64 {
	own := make([]float64, len(p.bound.Problem().Coordinates))
	for i, c := range p.bound.Problem().Coordinates {
		for _, pointer := range p.bound.Pointers(i) {
			if k, known := from[pointer]; known {
				own[i] = math.Max(c.Low, math.Min(c.High, z[k]))
			}
		}
	}
	return own
}

// corner returns the number of a worst corner.
func (w *worstCase) corner(p stage.Point) int {
	for i := range w.Corners {
		if same(&w.Corners[i].Point, &p) {
			return i
		}
	}
	w.Corners = append(w.Corners, WorstCorner{p})
	return len(w.Corners) - 1
}

// same reports whether two points have the same conditions.
func same(a, b *stage.Point) bool {
	return a.Input == b.Input && a.Load == b.Load && a.AmbientDegC == b.AmbientDegC && a.AgeRatio == b.AgeRatio
}

func union(list, more []string) []string {
	for _, m := range more {
		known := false
		for _, l := range list {
			known = known || l == m
		}
		if !known {
			list = append(list, m)
		}
	}
	return list
}
