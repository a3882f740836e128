package corners

import (
	"math"
	"slices"

	"railproof/calc/sampling"
)

const resamples = 400 // of the bootstrap

// Share is one coordinate's part of a quantity's variance, with bootstrap
// intervals.
type Share struct {
	Coordinate          int
	First               float64 // [1] first-order index
	FirstLow, FirstHigh float64 // [1]
	Total               float64 // [1] total index
	TotalLow, TotalHigh float64 // [1]
}

// Shares are the indices of one quantity, the greatest total first.
type Shares struct {
	Rows     int     // rows of the base sample with every value
	Variance float64 // [any] in the square of the quantity's unit
	Defined  bool    // false: the quantity does not vary, or has no values
	Shares   []Share
}

// Shares returns the indices of a quantity after the run. The intervals draw blocks
// of rows again with replacement, always the same draws.
func (a *Attribution) Shares(q int, confidence float64) Shares {
	k := a.place.Len()
	weights := make([]float64, attributionBlocks)
	for i := range weights {
		weights[i] = 1
	}
	rows, variance, first, total := a.indices(q, weights)
	s := Shares{Rows: int(rows), Variance: variance, Defined: rows >= 2 && variance > negligible*a.size(q)*a.size(q)}
	if !s.Defined {
		return s
	}
	draws := make([][]float64, 2*k)
	for r := range resamples {
		clear(weights)
		for i := range attributionBlocks {
			weights[sampling.Bits(sampling.Key(bootstrapSeed, uint64(r)), uint64(i))%attributionBlocks]++
		}
		_, v, f, t := a.indices(q, weights)
		if !(v > 0) {
			continue
		}
		for i := range k {
			draws[i] = append(draws[i], f[i])
			draws[k+i] = append(draws[k+i], t[i])
		}
	}
	for i := range k {
		x := Share{Coordinate: i, First: first[i], Total: total[i]}
		x.FirstLow, x.FirstHigh = percentileInterval(draws[i], first[i], confidence)
		x.TotalLow, x.TotalHigh = percentileInterval(draws[k+i], total[i], confidence)
		s.Shares = append(s.Shares, x)
	}
	slices.SortStableFunc(s.Shares, func(a, b Share) int {
		switch {
		case a.Total > b.Total:
			return -1
		case a.Total < b.Total:
			return 1
		}
		return 0
	})
	return s
}

const (
	bootstrapSeed = 0xb007
	// negligible is a variance, relative to the square of the value's size, that
	// rounding alone makes.
	negligible = 1e-24
)

// size returns the magnitude of a quantity's typical value.
func (a *Attribution) size(q int) float64 {
	if v := math.Abs(a.centre.result(0)[q]); v == v {
		return v
	}
	return 0
}

// indices evaluates the estimators over weighted blocks.
func (a *Attribution) indices(q int, weights []float64) (rows, variance float64, first, total []float64) {
	terms, k := a.terms(), a.place.Len()
	sum := make([]float64, terms)
	for b, w := range weights {
		if w == 0 {
			continue
		}
		rows += w * float64(a.blocks[b].n[q])
		for i, v := range a.blocks[b].value[q*terms:][:terms] {
			sum[i] += w * v
		}
	}
	mean := sum[0] / (2 * rows)
	variance = sum[1]/(2*rows) - mean*mean
	first, total = make([]float64, k), make([]float64, k)
	for i := range k {
		own := sum[baseTerms+ownTerms*i:]
		first[i] = (own[0] - mean*own[1]) / (rows * variance)
		total[i] = own[2] / (2 * rows * variance)
	}
	return rows, variance, first, total
}

// percentileInterval returns the middle share of the draws, widened if need be to
// hold the estimate itself.
func percentileInterval(draws []float64, estimate, confidence float64) (low, high float64) {
	if len(draws) == 0 {
		return math.NaN(), math.NaN()
	}
	slices.Sort(draws)
	at := int((1 - confidence) / 2 * float64(len(draws)))
	return min(estimate, draws[at]), max(estimate, draws[len(draws)-1-at])
}
