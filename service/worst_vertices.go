package service

import (
	"math"
	"slices"
	"strings"

	"railproof/calc/corners"
	"railproof/calc/evaluate"
	"railproof/calc/rules"
)

// pointList evaluates points, one a task: each takes a loop analysis or a load
// step.
type pointList struct {
	z, out [][]float64
	status []evaluate.Status
}

// Tasks implements corners.Work.
func (l *pointList) Tasks() int { return len(l.z) }

// Run implements corners.Work.
func (l *pointList) Run(task, _ int, m corners.Model) {
	l.status[task], _ = m.Eval(l.z[task], l.out[task])
}

// mostConditions is the number of conditions and drifts whose corners are all tried.
const mostConditions = 6 // [1]

// vertices looks for worst points where an evaluation is dear: all corners of the
// conditions with typical tolerances; from the worst of them for each target every
// tolerance alone at its ends; the vertex that these point to; and from the worst
// point so far every condition alone.
func (p *worstPass) vertices(d *driver, r *worstRequest) error {
	problem := p.bound.Problem()
	p.found = make([]corners.Extreme, len(problem.Targets))
	for i, t := range problem.Targets {
		p.found[i] = corners.Extreme{Target: t, Value: math.NaN()}
	}
	p.by = rules.Vertices
	if seeds := r.seeds(p); seeds != nil {
		p.by = rules.VerticesSeeded
		return p.seeded(d, r, seeds)
	}
	typical := make([]float64, len(problem.Coordinates))
	if err := p.try(d, p.conditionCorners(typical)); err != nil {
		return err
	}
	tolerances, conditions := p.split()
	for range signRounds {
		if err := p.signs(d, tolerances); err != nil {
			return err
		}
	}
	return p.try(d, p.around(p.places(), conditions))
}

// seeded goes on from the worst points of a like design: it moves what the other
// part has changed. A loop analysis is cheap enough to try all corners of the
// conditions at these points too, and to correct the vertex once by the tolerances
// that bore on the like design or are the part's own.
func (p *worstPass) seeded(d *driver, r *worstRequest, seeds [][]float64) error {
	if err := p.try(d, seeds); err != nil {
		return err
	}
	changed, found := p.changed(r.role), p.places()
	if p.kind == ofStep {
		return p.try(d, p.around(found, changed))
	}
	var points [][]float64
	for _, z := range found {
		points = append(points, p.conditionCorners(z)...)
	}
	if err := p.try(d, append(points, p.around(found, changed)...)); err != nil {
		return err
	}
	return p.signs(d, p.weighty(r, changed))
}

// weighty lists the tolerances that bore on the like design's worst values and those
// given beside them.
func (p *worstPass) weighty(r *worstRequest, besides []int) []int {
	list := slices.Clone(besides)
	i := slices.IndexFunc(r.like.passes, func(other *worstPass) bool { return other.kind == p.kind && other.full == p.full })
	from := r.like.passes[i]
	at := from.coordinates()
	tolerances, _ := p.split()
	for _, own := range tolerances {
		if !slices.Contains(list, own) && slices.ContainsFunc(p.bound.Pointers(own), func(pointer string) bool {
			k, known := at[pointer]
			return known && from.bears[k]
		}) {
			list = append(list, own)
		}
	}
	return list
}

// signRounds is how often the vertex is corrected by the signs found at it.
const signRounds = 2 // [1]

// split lists the coordinates that are tolerances and those that are not.
func (p *worstPass) split() (tolerances, conditions []int) {
	for i, c := range p.bound.Problem().Coordinates {
		if c.Kind == corners.Random {
			tolerances = append(tolerances, i)
		} else {
			conditions = append(conditions, i)
		}
	}
	return tolerances, conditions
}

// changed lists the coordinates of a part but its thermal path, which reaches loop
// and load step through the drift of a resistance only.
func (p *worstPass) changed(role string) (list []int) {
	for i := range p.bound.Problem().Coordinates {
		if slices.ContainsFunc(p.bound.Pointers(i), func(at string) bool {
			return strings.HasPrefix(at, role+"/") && !strings.HasPrefix(at, role+"/thermal/")
		}) {
			list = append(list, i)
		}
	}
	return list
}

// conditionCorners lists the typical point and every corner of the conditions.
func (p *worstPass) conditionCorners(typical []float64) [][]float64 {
	_, of := p.split()
	of = of[:min(len(of), mostConditions)]
	points := append(make([][]float64, 0, 1+1<<len(of)), typical)
	for bits := range 1 << len(of) {
		z := slices.Clone(typical)
		for k, i := range of {
			if z[i] = p.bound.Problem().Coordinates[i].Low; bits>>k&1 == 1 {
				z[i] = p.bound.Problem().Coordinates[i].High
			}
		}
		points = append(points, z)
	}
	return points
}

// places lists the distinct worst points so far.
func (p *worstPass) places() [][]float64 {
	var list [][]float64
	for i := range p.found {
		at := p.found[i].At
		if at != nil && !slices.ContainsFunc(list, func(z []float64) bool { return slices.Equal(z, at) }) {
			list = append(list, at)
		}
	}
	return list
}

// around moves single coordinates of points to their ends.
func (p *worstPass) around(places [][]float64, moved []int) [][]float64 {
	var points [][]float64
	for _, z := range places {
		for _, i := range moved {
			c := p.bound.Problem().Coordinates[i]
			for _, end := range []float64{c.Low, c.High} {
				if z[i] != end {
					next := slices.Clone(z)
					next[i] = end
					points = append(points, next)
				}
			}
		}
	}
	return points
}

// signs tries, from the worst points so far, every tolerance alone at its ends, and
// for each target the vertex to which the changes point.
func (p *worstPass) signs(d *driver, tolerances []int) error {
	starts := make([][]float64, len(p.found))
	for t := range p.found {
		starts[t] = p.found[t].At
	}
	for _, z := range p.places() {
		points := p.around([][]float64{z}, tolerances)
		list, err := p.evaluate(d, append(points, z))
		if err != nil {
			return err
		}
		p.record(list)
		var vertices [][]float64
		for t := range p.found {
			if slices.Equal(starts[t], z) {
				vertices = append(vertices, p.vertex(&p.found[t].Target, list))
			}
		}
		if err := p.try(d, vertices); err != nil {
			return err
		}
	}
	return nil
}

// vertex puts together the single moves that worsen a target; the last point of the
// list is the one from which they were made.
func (p *worstPass) vertex(t *corners.Target, list *pointList) []float64 {
	last := len(list.z) - 1
	z := list.z[last]
	vertex, gain := slices.Clone(z), make([]float64, len(z))
	for k := range list.z[:last] {
		for i := range z {
			if list.z[k][i] == z[i] {
				continue
			}
			base := list.out[last][t.Quantity]
			g := list.out[k][t.Quantity] - base
			p.bears[i] = p.bears[i] || math.Abs(g) > bearsShare*math.Abs(base)
			if t.Direction == corners.Least {
				g = -g
			}
			if g > gain[i] {
				gain[i], vertex[i] = g, list.z[k][i]
			}
		}
	}
	return vertex
}

// try evaluates points and remembers the worst.
func (p *worstPass) try(d *driver, points [][]float64) error {
	list, err := p.evaluate(d, points)
	if err != nil {
		return err
	}
	p.record(list)
	return nil
}

func (p *worstPass) evaluate(d *driver, points [][]float64) (*pointList, error) {
	l := &pointList{z: points, out: make([][]float64, len(points)), status: make([]evaluate.Status, len(points))}
	for i := range l.out {
		l.out[i] = make([]float64, len(p.ids))
	}
	return l, d.tasks(l, func() {})
}

// fails remembers one point of every status at which the stage does not work as
// asked: such a corner must not drop out of the search in silence.
func (p *worstPass) fails(status evaluate.Status, z []float64) {
	if status.OK() || slices.ContainsFunc(p.failures, func(f corners.Failure) bool { return f.Status == status }) {
		return
	}
	p.failures = append(p.failures, corners.Failure{Status: status, At: z})
}

func (p *worstPass) record(l *pointList) {
	for i, status := range l.status {
		works := status == evaluate.OK || status == evaluate.OverTemperature
		p.fails(status, l.z[i])
		for t := range p.found {
			f := &p.found[t]
			v := l.out[i][f.Quantity]
			switch {
			case !works:
			case math.IsNaN(v):
				p.blind[t] = true
			case math.IsNaN(f.Value), f.Direction == corners.Least && v < f.Value, f.Direction == corners.Greatest && v > f.Value:
				f.Value, f.At, f.Status = v, l.z[i], status
			}
		}
	}
}
