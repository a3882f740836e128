package corners

import "math"

// grid is the fixed division of one quantity's range at one corner of the
// conditions: known before the run, so that every worker counts into the same bins.
type grid struct {
	lo, hi         float64
	inverse        float64 // bins per unit
	middle, perRun float64 // centre and inverse width, for the sums
}

// leastHalfWidth keeps the inverse of a grid's width finite.
const leastHalfWidth = 1e-300

func newGrid(lo, hi float64, bins int) grid {
	if !(hi > lo) { // a constant, or nothing known
		half := max(1e-12*math.Abs(lo), leastHalfWidth)
		lo, hi = lo-half, hi+half
	}
	return grid{lo, hi, float64(bins) / (hi - lo), lo + (hi-lo)/2, 1 / (hi - lo)}
}

// The sums are kept exact, so that their order cannot matter: each term is first
// rounded to a multiple of 2^-28 of the grid's width (2^-27 for squares) by adding
// and taking away a constant whose last digit has that weight. 2^24 terms of size up
// to 2 stay below 2^53 units. The rounding moves a mean by at most 2^-29 of the
// width.
const (
	roundTerm   = 3 << 23 // 1.5 * 2^(52-28)
	roundSquare = 3 << 24
	farTerm     = 2.0 // grid widths from the middle: beyond, a term is held there and counted
)

// sketch is the streamed distribution of one quantity: counts and exact sums.
type sketch struct {
	counts      []uint32 // bins, then below and above the grid
	n, far      int
	sum, square float64
	min, max    float64
}

func newSketch(counts []uint32) sketch {
	return sketch{counts: counts, min: math.Inf(1), max: math.Inf(-1)}
}

// add takes in one quantity's column of results: every stride-th value from first.
func (s *sketch) add(g *grid, values []float64, first, stride int) {
	bins := len(s.counts) - 2
	n, sum, square, least, greatest := s.n, s.sum, s.square, s.min, s.max
	for i := first; i < len(values); i += stride {
		v := values[i]
		if v-v != 0 { // not a number, or infinite
			continue
		}
		n++
		if v < least {
			least = v
		}
		if v > greatest {
			greatest = v
		}
		t := (v - g.middle) * g.perRun
		if !(t <= farTerm && t >= -farTerm) {
			s.far++
			t = math.Copysign(farTerm, t)
		}
		sum += (t + roundTerm) - roundTerm
		square += (float64(t*t) + roundSquare) - roundSquare
		at := bins
		if v >= g.hi {
			at = bins + 1
		} else if v >= g.lo {
			at = min(int((v-g.lo)*g.inverse), bins-1)
		}
		s.counts[at]++
	}
	s.n, s.sum, s.square, s.min, s.max = n, sum, square, least, greatest
}

// merge adds another sketch over the same grid; every part of it is exact, so the
// order of merging does not matter.
func (s *sketch) merge(o *sketch) {
	for i, c := range o.counts {
		s.counts[i] += c
	}
	s.n += o.n
	s.far += o.far
	s.sum += o.sum
	s.square += o.square
	s.min, s.max = min(s.min, o.min), max(s.max, o.max)
}

func (s *sketch) mean(g *grid) float64 {
	return g.middle + s.sum/float64(s.n)*(g.hi-g.lo)
}

// deviation returns the sample's standard deviation, with n - 1.
func (s *sketch) deviation(g *grid) float64 {
	n := float64(s.n)
	mean := s.sum / n
	return math.Sqrt(max(0, s.square-n*mean*mean)/(n-1)) * (g.hi - g.lo)
}

// quantile returns the value below which the share p of the counts lies, straight
// within its bin, and the width of that bin: the greatest difference from the exact
// empirical quantile.
func (s *sketch) quantile(g *grid, p float64) (value, width float64) {
	if s.n == 0 {
		return math.NaN(), math.NaN()
	}
	bins := len(s.counts) - 2
	rank := p * float64(s.n)
	below, w := 0.0, (g.hi-g.lo)/float64(bins)
	for i := -1; i <= bins; i++ {
		var c float64
		lo, hi := g.lo+float64(i)*w, g.lo+float64(i+1)*w
		switch {
		case i < 0:
			c, lo, hi = float64(s.counts[bins]), s.min, g.lo
		case i == bins:
			c, lo, hi = float64(s.counts[bins+1]), g.hi, s.max
		default:
			c = float64(s.counts[i])
		}
		if c > 0 && below+c >= rank {
			lo, hi = max(lo, s.min), min(hi, s.max)
			return lo + (hi-lo)*max(0, rank-below)/c, hi - lo
		}
		below += c
	}
	return s.max, 0
}
