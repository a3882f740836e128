package corners

import (
	"math"

	"gonum.org/v1/gonum/stat/distuv"
)

// ClopperPearson returns the exact two-sided interval of a proportion of which k
// were seen in n independent trials:
//
//	low  = B(α/2; k, n−k+1),  high = B(1−α/2; k+1, n−k),  α = 1 − confidence
//
// with B the beta quantile; low is 0 for k = 0 and high 1 for k = n.
//
// Source: C. J. Clopper, E. S. Pearson, Biometrika 26, 404-413 (1934); NIST/SEMATECH
// e-Handbook 7.2.4.1. Checked by TestClopperPearsonHandbookExample.
//
// Returns NaN unless 0 <= k <= n, n >= 1 and 0 < confidence < 1.
func ClopperPearson(k, n int, confidence float64) (low, high float64) {
	return exactInterval(k, n, (1-confidence)/2)
}

// ClopperPearsonUpper returns the exact one-sided upper bound.
func ClopperPearsonUpper(k, n int, confidence float64) float64 {
	_, high := exactInterval(k, n, 1-confidence)
	return high
}

func exactInterval(k, n int, tail float64) (low, high float64) {
	if !(k >= 0 && k <= n && n >= 1 && tail > 0 && tail < 1) {
		return math.NaN(), math.NaN()
	}
	// The closed forms at the ends keep the digits that the general beta quantile
	// loses there.
	switch {
	case k == 0 && n > 0:
		return 0, -math.Expm1(math.Log(tail) / float64(n))
	case k == n:
		return math.Exp(math.Log(tail) / float64(n)), 1
	}
	low = distuv.Beta{Alpha: float64(k), Beta: float64(n - k + 1)}.Quantile(tail)
	high = distuv.Beta{Alpha: float64(k + 1), Beta: float64(n - k)}.Quantile(1 - tail)
	return low, high
}

// Wilson returns the score interval of a proportion:
//
//	(p + z²/2n ∓ z √(p(1−p)/n + z²/4n²)) / (1 + z²/n),  p = k/n
//
// Source: E. B. Wilson, J. Am. Stat. Assoc. 22, 209-212 (1927); NIST/SEMATECH
// e-Handbook 7.2.4.1. Checked by TestWilsonInterval.
//
// Returns NaN unless 0 <= k <= n, n >= 1 and 0 < confidence < 1.
func Wilson(k, n int, confidence float64) (low, high float64) {
	if !(k >= 0 && k <= n && n >= 1 && confidence > 0 && confidence < 1) {
		return math.NaN(), math.NaN()
	}
	z, m := twoSidedScore(confidence), float64(n)
	p := float64(k) / m
	middle := p + z*z/(2*m)
	half := z * math.Sqrt(p*(1-p)/m+z*z/(4*m*m))
	scale := 1 + z*z/m
	return max(0, (middle-half)/scale), min(1, (middle+half)/scale)
}

// twoSidedScore returns the standard normal deviate that the confidence lies within.
func twoSidedScore(confidence float64) float64 {
	return distuv.UnitNormal.Quantile((1 + confidence) / 2)
}

// studentHalfWidth returns the factor on a standard error from r replicates, NaN
// from one: it tells nothing of its own error.
func studentHalfWidth(r int, confidence float64) float64 {
	if r < 2 {
		return math.NaN()
	}
	return distuv.StudentsT{Mu: 0, Sigma: 1, Nu: float64(r - 1)}.Quantile((1 + confidence) / 2)
}
