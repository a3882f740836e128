package corners

import "math"

const (
	// slopeStep is small enough that curvature enters a slope by its square, and
	// large enough that a temperature tolerance of 1e-3 K does not show in it.
	slopeStep = 0.02 // of a half width
	// StraightEnough is the greatest share of the random term by which the response
	// may leave its straight line before a root-sum-square is not to be trusted.
	StraightEnough = 0.1
)

// RootSumSquare is the linear estimate of a target's range at one corner of the
// conditions.
//
//	Greatest = Typical + BiasAbove + √(Σ above_i²)
//	Least    = Typical − |BiasBelow| − √(Σ below_i²)
//
// above_i and below_i are what tolerance i alone adds to and takes from the quantity
// by its slope at the typical value. Bias terms have a known sign and add linearly;
// only tolerances go under the root. It assumes a straight response and tolerances
// that are equal multiples of their deviations: 3 sigma in, 3 sigma out.
//
// Source: worst-case circuit analysis as in the RIAC desk reference; random and bias
// terms as in the Reliability Toolkit, Rome Laboratory. Checked by
// TestSetPointRootSumSquare and TestBiasAddsLinearly.
type RootSumSquare struct {
	Corner               []float64 // coordinates: conditions at their corner, all else typical
	Typical              float64   // [any] the quantity there
	BiasAbove, BiasBelow float64   // [any] sums of the bias terms that raise and lower it
	RandomAbove          float64   // [any] root of the sum of squares
	RandomBelow          float64   // [any]
	Least, Greatest      float64   // [any]
	Deviation            float64   // [any] standard deviation of the straight response under the distributions
	Slopes               []Slope   // one per coordinate; zero for conditions
	Curvature            float64   // [1] measured departure from the straight line, relative to it
	CurvatureAt          []float64 // where it was measured as greatest
	designPoint          int       // in the batch
}

// Trusted reports whether the response is straight enough for the estimate.
func (r *RootSumSquare) Trusted() bool { return r.Curvature <= StraightEnough }

// Slope is the change of a quantity per half width of one coordinate.
type Slope struct {
	Below, Above float64 // [any] for z below and above the typical value
}

// LinearJob estimates every target by root-sum-square at the conditions of its
// worst point.
type LinearJob struct {
	p       *Problem
	batch   batch
	bases   []base
	results []RootSumSquare
	stage   int
	done    int // evaluations
}

// base is one corner of the conditions, shared by the targets whose worst point has
// the same conditions.
type base struct {
	z       []float64
	first   int // in the batch
	targets []int
}

// NewLinear prepares the estimate at the conditions of each target's worst point;
// corners[i] nil takes the typical conditions.
func NewLinear(p *Problem, corners [][]float64) *LinearJob {
	j := &LinearJob{p: p, results: make([]RootSumSquare, len(p.Targets))}
	for t := range p.Targets {
		z := make([]float64, len(p.Coordinates))
		for i := range z {
			if corners[t] != nil && p.Coordinates[i].Kind == Condition {
				z[i] = corners[t][i]
			}
		}
		j.results[t].Corner = z
		j.addBase(z, t)
	}
	return j
}

func (j *LinearJob) addBase(z []float64, target int) {
	for i := range j.bases {
		if equal(j.bases[i].z, z) {
			j.bases[i].targets = append(j.bases[i].targets, target)
			return
		}
	}
	j.bases = append(j.bases, base{z: z, targets: []int{target}})
}

func equal(a, b []float64) bool {
	for i := range a {
		if a[i] != b[i] {
			return false
		}
	}
	return true
}

// Next implements Job: slopes first, then the points at which straightness is
// measured.
func (j *LinearJob) Next() Work {
	switch j.stage {
	case 0:
		j.batch.reset(j.p)
		for i := range j.bases {
			j.proposeSlopes(&j.bases[i])
		}
	case 1:
		for i := range j.bases {
			j.takeSlopes(&j.bases[i])
		}
		j.batch.reset(j.p)
		for t := range j.results {
			j.proposeStraightness(t)
		}
	default:
		for t := range j.results {
			j.takeStraightness(t)
		}
		return nil
	}
	j.stage++
	j.batch.ready()
	j.done += j.batch.len()
	return &j.batch
}

// Evaluations returns the number of evaluations handed out.
func (j *LinearJob) Evaluations() int { return j.done }

// proposeSlopes adds the base, and per coordinate two near points and the end on
// each side.
func (j *LinearJob) proposeSlopes(s *base) {
	s.first = j.batch.len()
	j.batch.add(FromSearch, s.z)
	for i := range j.p.Coordinates {
		c := &j.p.Coordinates[i]
		switch c.Kind {
		case Random:
			for _, end := range []float64{c.Low, c.High} {
				j.batch.moved(s.z, i, slopeStep*end)
				j.batch.moved(s.z, i, 2*slopeStep*end)
			}
		case Bias:
			j.batch.moved(s.z, i, c.Low)
			j.batch.moved(s.z, i, c.High)
		}
	}
}

func (j *LinearJob) takeSlopes(s *base) {
	for _, t := range s.targets {
		r, q := &j.results[t], j.p.Targets[t].Quantity
		r.Slopes = make([]Slope, len(j.p.Coordinates))
		at := s.first
		value := func() float64 { v := j.batch.result(at)[q]; at++; return v }
		r.Typical = value()
		above, below, variance := 0.0, 0.0, 0.0
		for i := range j.p.Coordinates {
			c := &j.p.Coordinates[i]
			switch c.Kind {
			case Random:
				down := oneSided(r.Typical, value(), value())
				up := oneSided(r.Typical, value(), value())
				a, b := sides(down, up)
				above += a * a
				below += b * b
				r.Slopes[i] = slopes(c, down, up)
				d := c.Moments.Deviation(r.Slopes[i].Above, r.Slopes[i].Below)
				variance += d * d
			case Bias:
				a, b := sides(value()-r.Typical, value()-r.Typical)
				r.BiasAbove += a
				r.BiasBelow += b
			}
		}
		r.RandomAbove, r.RandomBelow, r.Deviation = math.Sqrt(above), math.Sqrt(below), math.Sqrt(variance)
		r.Greatest = r.Typical + r.BiasAbove + r.RandomAbove
		r.Least = r.Typical + r.BiasBelow - r.RandomBelow
	}
}

// oneSided extrapolates the change at the end from two near points, exact to the
// curvature.
func oneSided(f0, f1, f2 float64) float64 {
	return (4*(f1-f0) - (f2 - f0)) / (2 * slopeStep)
}

// sides splits two changes into the greatest rise and the greatest fall.
func sides(a, b float64) (rise, fall float64) {
	return max(0, a, b), min(0, a, b)
}

func slopes(c *Coordinate, down, up float64) Slope {
	var s Slope
	if c.Low < 0 {
		s.Below = down / c.Low
	}
	if c.High > 0 {
		s.Above = up / c.High
	}
	return s
}

// proposeStraightness adds the points where the straight response reaches the root
// sum square on the target's side, and the vertex it points to.
func (j *LinearJob) proposeStraightness(t int) {
	r := &j.results[t]
	r.designPoint = j.batch.len()
	side := r.RandomAbove
	if j.p.Targets[t].Direction == Least {
		side = r.RandomBelow
	}
	for _, vertex := range []bool{false, true} {
		z := j.batch.add(FromSearch, r.Corner)
		for i := range z {
			c := &j.p.Coordinates[i]
			end, change := c.worstEnd(&r.Slopes[i], j.p.Targets[t].Direction)
			if c.Kind != Random || !(change != 0) {
				continue
			}
			if z[i] = end; !vertex {
				z[i] *= math.Abs(change) / side
			}
		}
	}
}

// worstEnd returns the end to which the slopes drive the quantity, and its change.
func (c *Coordinate) worstEnd(s *Slope, d Direction) (end, change float64) {
	low, high := s.Below*c.Low, s.Above*c.High
	if d == Least {
		low, high = -low, -high
	}
	switch {
	case high > 0 && high >= low:
		return c.High, s.Above * c.High
	case low > 0:
		return c.Low, s.Below * c.Low
	}
	return 0, 0
}

func (j *LinearJob) takeStraightness(t int) {
	r, target := &j.results[t], &j.p.Targets[t]
	for k := range 2 {
		z := j.batch.point(r.designPoint + k)
		straight := 0.0
		for i := range z {
			if j.p.Coordinates[i].Kind != Random {
				continue
			}
			if z[i] > 0 {
				straight += r.Slopes[i].Above * z[i]
			} else {
				straight += r.Slopes[i].Below * z[i]
			}
		}
		if straight == 0 {
			continue
		}
		change := j.batch.result(r.designPoint + k)[target.Quantity] - r.Typical
		departure := math.Abs(change/straight - 1)
		if departure > r.Curvature || math.IsNaN(departure) {
			r.Curvature = departure
			r.CurvatureAt = append(r.CurvatureAt[:0], z...)
		}
	}
	if math.IsNaN(r.Curvature) { // a failing evaluation: no straight line leads there
		r.Curvature = math.Inf(1)
	}
}

// Results returns the estimates in the order of the targets.
func (j *LinearJob) Results() []RootSumSquare { return j.results }
