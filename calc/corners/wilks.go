package corners

import (
	"math"

	"gonum.org/v1/gonum/stat/distuv"
)

// maxWilks bounds the search for a sample size.
const maxWilks = 1 << 40

// WilksSize returns the smallest number n of independent samples for which the
// order-th greatest lies, with the given confidence, at or above the coverage
// quantile of the population, whatever its distribution:
//
//	P(Binomial(n, 1 − coverage) ≥ order) ≥ confidence
//
// n must be fixed before looking, and failed samples must not be dropped. It says
// nothing of Latin-hypercube or low-discrepancy points.
//
// Source: S. S. Wilks, "Determination of sample sizes for setting tolerance
// limits", Ann. Math. Stat. 12, 91-96 (1941). Checked by TestWilksSampleSizes.
//
// Returns 0 unless 0 < coverage, confidence < 1 and order >= 1.
func WilksSize(coverage, confidence float64, order int) int {
	return leastSize(order, coverage, confidence)
}

// WilksSizeTwoSided is the same for the interval from the order-th least to the
// order-th greatest sample.
func WilksSizeTwoSided(coverage, confidence float64, order int) int {
	return leastSize(2*order, coverage, confidence)
}

func leastSize(beyond int, coverage, confidence float64) int {
	if !(coverage > 0 && coverage < 1 && confidence > 0 && confidence < 1 && beyond >= 1) {
		return 0
	}
	enough := func(n int) bool { return wilksConfidence(n, beyond, coverage) >= confidence }
	hi := beyond
	for !enough(hi) {
		if hi *= 2; hi > maxWilks {
			return 0
		}
	}
	lo := hi / 2
	for hi-lo > 1 {
		if mid := lo + (hi-lo)/2; mid >= beyond && enough(mid) {
			hi = mid
		} else {
			lo = mid
		}
	}
	return hi
}

// wilksConfidence returns P(Binomial(n, 1 − coverage) >= r), as the beta
// distribution function I_(1-coverage)(r, n - r + 1).
func wilksConfidence(n, r int, coverage float64) float64 {
	if r > n {
		return 0
	}
	return distuv.Beta{Alpha: float64(r), Beta: float64(n - r + 1)}.CDF(1 - coverage)
}

// WilksOrder returns the greatest order r for which the r-th greatest of n
// independent samples bounds the coverage quantile with the confidence; 0 if even
// the greatest does not.
func WilksOrder(n int, coverage, confidence float64) int {
	lo, hi := 0, n+1
	for hi-lo > 1 {
		if mid := lo + (hi-lo)/2; wilksConfidence(n, mid, coverage) >= confidence {
			lo = mid
		} else {
			hi = mid
		}
	}
	return lo
}

// CoveredShare returns the share of a population that lies at or below the
// greatest of n independent samples, with the given confidence:
// (1 − confidence)^(1/n).
func CoveredShare(n int, confidence float64) float64 {
	return math.Pow(1-confidence, 1/float64(n))
}
