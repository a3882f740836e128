package corners

import (
	"math"

	"gonum.org/v1/gonum/stat/distuv"
)

// Statistics describes one quantity over the units at one corner of the conditions.
// Units whose evaluation gave it no value are left out and counted by Failures.
type Statistics struct {
	Units           int     // with a value
	Mean            float64 // [any]
	Deviation       float64 // [any] standard deviation, with n - 1
	Least, Greatest float64 // [any]
	// Far counts values more than two grid widths from the grid's middle; they stand
	// in Mean and Deviation as if they lay there.
	Far int

	run          *MonteCarlo
	corner, cell int
	whole        sketch
}

// Statistics returns the distribution of a quantity at a corner of the finished run.
func (m *MonteCarlo) Statistics(corner, q int) *Statistics {
	s := &Statistics{run: m, corner: corner, cell: corner*m.p.Quantities + q}
	s.whole = newSketch(make([]uint32, m.bins+2))
	for r := range m.sampler.Replicates() {
		s.whole.merge(s.replicate(r))
	}
	w, g := &s.whole, &m.grids[s.cell]
	s.Units, s.Far, s.Least, s.Greatest = w.n, w.far, w.min, w.max
	if w.n == 0 {
		s.Least, s.Greatest = math.NaN(), math.NaN()
	}
	s.Mean, s.Deviation = w.mean(g), w.deviation(g)
	return s
}

func (s *Statistics) replicate(r int) *sketch {
	return &s.run.total.sketches[r*len(s.run.plan.Corners)*s.run.p.Quantities+s.cell]
}

func (s *Statistics) grid() *grid { return &s.run.grids[s.cell] }

// MeanError returns the half width of the confidence interval of the mean: from the
// deviation for independent samples, else from the spread of the replicates.
func (s *Statistics) MeanError(confidence float64) float64 {
	if s.run.sampler.Replicates() == 1 {
		return studentHalfWidth(s.Units, confidence) * s.Deviation / math.Sqrt(float64(s.Units))
	}
	return s.replicateError(confidence, func(k *sketch) float64 { return k.mean(s.grid()) })
}

// replicateError returns Student's half width of the mean of a figure over the
// replicates.
func (s *Statistics) replicateError(confidence float64, figure func(k *sketch) float64) float64 {
	values := make([]float64, s.run.sampler.Replicates())
	for r := range values {
		values[r] = figure(s.replicate(r))
	}
	return meanHalfWidth(values, confidence)
}

func meanHalfWidth(values []float64, confidence float64) float64 {
	n, mean, square := float64(len(values)), 0.0, 0.0
	for _, v := range values {
		mean += v / n
	}
	for _, v := range values {
		square += (v - mean) * (v - mean)
	}
	return studentHalfWidth(len(values), confidence) * math.Sqrt(square/(n-1)/n)
}

// Quantile is one estimated quantile.
type Quantile struct {
	Probability float64 // [1]
	Value       float64 // [any]
	Error       float64 // [any] greatest difference from the samples' own quantile
	Low, High   float64 // [any] confidence interval; NaN: the samples give no bound
}

// Quantile returns the value below which a share of the units lies. Its interval is
// by the binomial law of the order statistics for independent samples, exact up to
// the sketch's error; else by the spread of the replicates.
func (s *Statistics) Quantile(probability, confidence float64) Quantile {
	q := Quantile{Probability: probability, Low: math.NaN(), High: math.NaN()}
	q.Value, q.Error = s.whole.quantile(s.grid(), probability)
	if s.Units == 0 {
		return q
	}
	if s.run.sampler.Replicates() > 1 {
		half := s.replicateError(confidence, func(k *sketch) float64 {
			v, _ := k.quantile(s.grid(), probability)
			return v
		})
		q.Low, q.High = q.Value-half, q.Value+half
		return q
	}
	low, high := orderInterval(s.Units, probability, confidence)
	if low >= 1 {
		q.Low, _ = s.whole.quantile(s.grid(), float64(low)/float64(s.Units))
	}
	if high <= s.Units {
		q.High, _ = s.whole.quantile(s.grid(), float64(high)/float64(s.Units))
	}
	return q
}

// orderInterval returns the ranks, 1 to n, of the order statistics that enclose a
// quantile with the confidence: the greatest l with P(Bin(n, p) < l) <= α/2 and the
// least u with P(Bin(n, p) >= u) <= α/2; 0 and n+1 where there is none.
//
// Source: W. J. Conover, "Practical Nonparametric Statistics", 3rd ed., 1999,
// section 3.2.
func orderInterval(n int, p, confidence float64) (low, high int) {
	tail := (1 - confidence) / 2
	if !(p > 0 && p < 1) {
		return 0, n + 1
	}
	bin := distuv.Binomial{N: float64(n), P: p}
	low = leastWhere(n+1, func(k int) bool { return bin.CDF(float64(k)) > tail })
	high = 1 + leastWhere(n+1, func(k int) bool { return bin.CDF(float64(k)) >= 1-tail })
	return low, high
}

// leastWhere returns the least k in [0, n) for which a rising condition holds, else n.
func leastWhere(n int, holds func(k int) bool) int {
	lo, hi := 0, n
	for lo < hi {
		if mid := lo + (hi-lo)/2; holds(mid) {
			hi = mid
		} else {
			lo = mid + 1
		}
	}
	return lo
}

// WilksBound returns the bound on one side that holds for the covered share of all
// units with the confidence, whatever the distribution, and the order used; it is
// taken at the outer edge of its bin. NaN and 0 if there are too few samples or they
// are not independent.
func (s *Statistics) WilksBound(side Direction, coverage, confidence float64) (bound float64, order int) {
	if s.run.sampler.Replicates() > 1 || s.Units < s.run.Units() {
		return math.NaN(), 0
	}
	order = WilksOrder(s.Units, coverage, confidence)
	if order == 0 {
		return math.NaN(), 0
	}
	rank := float64(s.Units - order + 1)
	if side == Least {
		rank = float64(order)
	}
	v, width := s.whole.quantile(s.grid(), rank/float64(s.Units))
	if side == Least {
		return max(s.Least, v-width), order
	}
	return min(s.Greatest, v+width), order
}

// Capability returns the indices against limits (NaN: none) from mean and deviation.
func (s *Statistics) Capability(lsl, usl float64) Capability {
	return CapabilityOf(s.Mean, s.Deviation, lsl, usl)
}

// PercentileCapability returns the indices by quantiles, for any shape.
func (s *Statistics) PercentileCapability(lsl, usl float64) Capability {
	g := s.grid()
	low, _ := s.whole.quantile(g, 0.00135)
	median, _ := s.whole.quantile(g, 0.5)
	high, _ := s.whole.quantile(g, 0.99865)
	return PercentileCapability(low, median, high, lsl, usl)
}

// Histogram returns counts in at most the given number of equal bins over the values
// seen, with one more edge than counts, and the counts outside.
func (s *Statistics) Histogram(bins int) (edges []float64, counts []int, below, above int) {
	fine := len(s.whole.counts) - 2
	first, last := fine, 0
	for i, c := range s.whole.counts[:fine] {
		if c > 0 {
			first, last = min(first, i), i+1
		}
	}
	below, above = int(s.whole.counts[fine]), int(s.whole.counts[fine+1])
	if first >= last || bins < 1 {
		return []float64{}, []int{}, below, above
	}
	group := (last - first + bins - 1) / bins
	g := s.grid()
	w := (g.hi - g.lo) / float64(fine)
	edges = append(edges, g.lo+float64(first)*w)
	for i := first; i < last; i += group {
		n := 0
		for _, c := range s.whole.counts[i:min(i+group, fine)] {
			n += int(c)
		}
		counts = append(counts, n)
		edges = append(edges, g.lo+float64(i+group)*w)
	}
	return edges, counts, below, above
}
