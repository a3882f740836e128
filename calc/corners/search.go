package corners

import (
	"math"

	"railproof/calc/evaluate"
	"railproof/calc/switched"
)

// Extreme is the worst point found for a target.
type Extreme struct {
	Target
	Value  float64 // [any] NaN if no point had a value
	At     []float64
	Status evaluate.Status
	Mode   switched.Mode
	Origin Origin
	Sample int // number of the sample, for FromSample
	// Vertex is the worst value at the corners of the box that were tried.
	Vertex float64 // [any]
	// BeyondVertices: the point lies inside the box and is worse than every corner
	// tried, by more than rounding and the model's own tolerance.
	BeyondVertices bool
	// Proven: the target's analysis shows it monotonic, the corner it names was
	// evaluated, and no point tried contradicts it. Otherwise Value is the worst
	// found, no more.
	Proven bool
}

// Failure is the failing point nearest to the typical one, by kind.
type Failure struct {
	Status   evaluate.Status
	At       []float64
	Distance float64 // [1] greatest coordinate, in half widths
	Count    int     // points tried that failed so
}

// Search looks for the worst point of every target: the typical point, each
// coordinate alone at its ends, every corner of the conditions, every vertex if
// there are few, points spread over the box; then, from the worst of these, vertices
// by sensitivity until its signs hold, the borders where the conduction mode or the
// status changes, and a bounded descent inside the box. Every evaluation serves
// every target.
type Search struct {
	p       *Problem
	batch   batch
	phases  []phase
	started bool

	nominal    []float64
	nominalEnd evaluate.Status
	ends       [2][]float64 // [end][coordinate*quantities + quantity]: one at a time
	found      []incumbent
	span       [][2]float64 // least and greatest value seen of each quantity
	missing    []int        // points at which a quantity had no value although the stage had figures
	failures   [evaluate.StatusCount]Failure
	borders    []border
	starts     [][]start
	resting    []bool // targets that a resumed search leaves alone
	scattered  int    // independent points spread evenly over the box
	evaluated  int
}

// incumbent is a target's worst point so far.
type incumbent struct {
	Extreme
	score  float64
	vertex float64 // score
}

// phase is a step of the search that proposes points and takes in their values
// until it is done.
type phase interface {
	propose(s *Search, b *batch)
	absorb(s *Search, b *batch) (done bool)
}

// NewSearch prepares the search.
func NewSearch(p *Problem) *Search {
	s := &Search{
		p: p, found: make([]incumbent, len(p.Targets)), starts: make([][]start, len(p.Targets)),
		span: make([][2]float64, p.Quantities), resting: make([]bool, len(p.Targets)), missing: make([]int, p.Quantities),
	}
	for i := range s.found {
		t := p.Targets[i]
		none := math.Inf(-1)
		s.found[i] = incumbent{Extreme{Target: t, Value: math.NaN(), Vertex: math.NaN()}, none, none}
	}
	for q := range s.span {
		s.span[q] = [2]float64{math.Inf(1), math.Inf(-1)}
	}
	s.phases = []phase{&survey{}, &climbing{}, &bordering{}, &descending{}, &climbing{settle: true}}
	return s
}

// Resume continues a finished search from further points, such as the worst
// samples of a Monte Carlo run, and searches on for the targets they worsen.
func (s *Search) Resume(points [][]float64, samples []int) {
	s.phases = []phase{&resumed{points: points, samples: samples}, &descending{}, &climbing{settle: true}}
	s.started = false
}

// Next implements Job.
func (s *Search) Next() Work {
	for len(s.phases) > 0 {
		if s.started {
			s.record()
			if s.phases[0].absorb(s, &s.batch) {
				s.phases = s.phases[1:]
				s.started = false
				continue
			}
		}
		s.started = true
		s.batch.reset(s.p)
		s.phases[0].propose(s, &s.batch)
		s.batch.ready()
		if s.batch.len() > 0 {
			return &s.batch
		}
	}
	return nil
}

// record lets every target and every failure kind see the batch.
func (s *Search) record() {
	b := &s.batch
	s.evaluated += b.len()
	for i := range b.len() {
		s.recordFailure(i)
		figures := b.status[i].Figures()
		for q, v := range b.result(i) {
			if v != v && figures {
				s.missing[q]++
			}
			if v < s.span[q][0] {
				s.span[q][0] = v
			}
			if v > s.span[q][1] {
				s.span[q][1] = v
			}
		}
		vertex := s.p.isVertex(b.point(i))
		for k := range s.found {
			f := &s.found[k]
			score := b.score(i, &f.Target)
			if vertex && score > f.vertex {
				f.vertex = score
				f.Vertex = b.result(i)[f.Quantity]
			}
			if score > f.score {
				f.score = score
				f.Value = b.result(i)[f.Quantity]
				f.At = append(f.At[:0], b.point(i)...)
				f.Status, f.Mode, f.Origin, f.Sample = b.status[i], b.mode[i], b.origin[i], 0
				if f.Origin == FromSearch && vertex {
					f.Origin = FromVertex
				}
			}
		}
	}
}

func (s *Search) recordFailure(i int) {
	status := s.batch.status[i]
	if status.OK() {
		return
	}
	f := &s.failures[status]
	f.Count++
	distance := 0.0
	for _, z := range s.batch.point(i) {
		distance = max(distance, math.Abs(z))
	}
	if f.Count == 1 || distance < f.Distance {
		f.Status, f.Distance = status, distance
		f.At = append(f.At[:0], s.batch.point(i)...)
	}
}

// isVertex reports whether every coordinate is at an end.
func (p *Problem) isVertex(z []float64) bool {
	for i, x := range z {
		if x != p.Coordinates[i].Low && x != p.Coordinates[i].High {
			return false
		}
	}
	return true
}

// beyondNoise is the gain over the best vertex, relative to the quantity's span over
// the box, from which an inner point counts as worse: ten times what a temperature
// tolerance of 1e-3 K leaves in a result.
const beyondNoise = 1e-5

// Extremes returns the worst points found, in the order of the targets.
func (s *Search) Extremes() []Extreme {
	e := make([]Extreme, len(s.found))
	for i := range s.found {
		f := &s.found[i]
		e[i] = f.Extreme
		e[i].At = append([]float64(nil), f.At...)
		gain := f.score - f.vertex
		e[i].BeyondVertices = gain > beyondNoise*s.width(f.Quantity)
		e[i].Proven = s.proven(f)
	}
	return e
}

// proven reports whether the found point is the vertex that the target's analysis
// names and every evaluation in the box succeeded.
func (s *Search) proven(f *incumbent) bool {
	if f.Monotonic == nil || f.At == nil {
		return false
	}
	for _, failure := range s.failures {
		if failure.Count > 0 {
			return false
		}
	}
	for i, sign := range f.Monotonic {
		c := &s.p.Coordinates[i]
		end := c.High
		if (sign < 0) != (f.Direction == Least) {
			end = c.Low
		}
		if sign != 0 && f.At[i] != end {
			return false
		}
	}
	return true
}

// width returns the span of values seen of a quantity.
func (s *Search) width(q int) float64 {
	return max(0, s.span[q][1]-s.span[q][0])
}

// Span returns the least and greatest value seen of a quantity; the least is above
// the greatest if it never had one.
func (s *Search) Span(q int) (least, greatest float64) { return s.span[q][0], s.span[q][1] }

// Missing returns the number of points at which a quantity had no value although
// the stage had figures, such as the margins of a loop that is not stable.
func (s *Search) Missing(q int) int { return s.missing[q] }

// Nominal returns every quantity at the typical point, and its status.
func (s *Search) Nominal() ([]float64, evaluate.Status) { return s.nominal, s.nominalEnd }

// OneAtATime returns a quantity with one coordinate at its low and high end and all
// others typical.
func (s *Search) OneAtATime(coordinate, q int) (low, high float64) {
	at := coordinate*s.p.Quantities + q
	return s.ends[0][at], s.ends[1][at]
}

// Failures returns the failing point nearest to the typical one, for each kind seen.
func (s *Search) Failures() []Failure {
	var list []Failure
	for _, f := range s.failures {
		if f.Count > 0 {
			list = append(list, f)
		}
	}
	return list
}

// Evaluations returns the number of evaluations done.
func (s *Search) Evaluations() int { return s.evaluated }

// Covered returns the share of the box, by volume in the coordinates, that holds
// nothing worse than the points found, with the given confidence: what independent
// points spread evenly over it show and no more.
func (s *Search) Covered(confidence float64) float64 { return CoveredShare(s.scattered, confidence) }
