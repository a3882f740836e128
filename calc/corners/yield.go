package corners

import "math"

// Yield is the share of units that pass every limit at every corner of the
// conditions; a failed evaluation is no pass.
type Yield struct {
	Units, Passes int
	Share         float64 // [1]
	Low, High     float64 // [1] confidence interval
	Exact         bool    // by Clopper and Pearson; else by the spread of the replicates
}

// Yield returns the joint yield of the finished run.
func (m *MonteCarlo) Yield(confidence float64) Yield {
	var y Yield
	shares := make([]float64, m.sampler.Replicates())
	for r := range shares {
		y.Units += m.total.units[r]
		y.Passes += m.total.passes[r]
		shares[r] = float64(m.total.passes[r]) / float64(m.total.units[r])
	}
	y.Share = float64(y.Passes) / float64(y.Units)
	if len(shares) == 1 {
		y.Exact = true
		y.Low, y.High = ClopperPearson(y.Passes, y.Units, confidence)
		return y
	}
	// Replicates that all agree still leave the chance of one unit in one of them.
	n := float64(len(shares))
	floor := studentHalfWidth(len(shares), confidence) / float64(m.sampler.PerReplicate()) / math.Sqrt(n)
	half := max(floor, meanHalfWidth(shares, confidence))
	y.Low, y.High = max(0, y.Share-half), min(1, y.Share+half)
	return y
}

// Broken returns the number of units that break a limit at any corner.
func (m *MonteCarlo) Broken(limit int) int { return m.total.broken[limit] }

// Beyond returns the number of units that break a limit at one corner.
func (m *MonteCarlo) Beyond(corner, limit int) int {
	return m.total.beyond[corner*len(m.plan.Limits)+limit]
}

// Worst returns the worst samples of a target, the worst first.
func (m *MonteCarlo) Worst(target int) []WorstSample { return m.total.worst[target] }

// WorstPoints returns the coordinates and numbers of the worst sample of every
// target, for Search.Resume.
func (m *MonteCarlo) WorstPoints() (points [][]float64, samples []int) {
	for _, w := range m.total.worst {
		if len(w) > 0 {
			points = append(points, m.Sample(w[0].Sample, w[0].Corner))
			samples = append(samples, w[0].Sample)
		}
	}
	return points, samples
}

// Failures returns the failed evaluations by kind and corner.
func (m *MonteCarlo) Failures() []FailureCount {
	var list []FailureCount
	for _, f := range m.total.failures {
		if f.Count > 0 {
			list = append(list, f)
		}
	}
	return list
}

// Bins returns the number of bins of each sketch.
func (m *MonteCarlo) Bins() int { return m.bins }

// Replicates returns the number of independent sets among the units.
func (m *MonteCarlo) Replicates() int { return m.sampler.Replicates() }
