package corners

import (
	"math"

	"gonum.org/v1/gonum/integrate/quad"
	"gonum.org/v1/gonum/stat/distuv"
)

// NormalToleranceOneSided returns k such that mean + k s of n independent normal
// samples bounds the given share of the population with the confidence: exactly
//
//	P(√n k ≥ T) = confidence,  T noncentral t with n−1 degrees, shift z_coverage √n
//
// Source: NIST/SEMATECH e-Handbook 7.2.6.3. Checked by TestNormalToleranceFactors.
//
// Returns NaN unless n >= 2 and 0 < coverage, confidence < 1.
func NormalToleranceOneSided(n int, coverage, confidence float64) float64 {
	if !toleranceArguments(n, coverage, confidence) {
		return math.NaN()
	}
	zp, m := distuv.UnitNormal.Quantile(coverage), float64(n)
	return solveTolerance(-100, func(k float64) float64 {
		// P(mean + k s >= z_p) over the distribution of s
		return overDeviation(n, func(s float64) float64 {
			return distuv.UnitNormal.CDF((k*s - zp) * math.Sqrt(m))
		})
	}, confidence)
}

// NormalToleranceTwoSided returns k such that mean ± k s holds the given share with
// the confidence, exactly: the share between, averaged over the distributions of
// mean and s.
//
// Source: definition, integrated. Checked by TestNormalToleranceFactors.
func NormalToleranceTwoSided(n int, coverage, confidence float64) float64 {
	if !toleranceArguments(n, coverage, confidence) {
		return math.NaN()
	}
	chi := distuv.ChiSquared{K: float64(n - 1)}
	return solveTolerance(0, func(k float64) float64 {
		return quad.Fixed(func(x float64) float64 {
			// least half width that still covers when the mean is off by x/sqrt n
			half := halfWidthAround(x/math.Sqrt(float64(n)), coverage)
			least := float64(n-1) * half * half / (k * k)
			return 2 * distuv.UnitNormal.Prob(x) * chi.Survival(least)
		}, 0, quadratureEnd, quadraturePoints, nil, 0)
	}, confidence)
}

// HoweTolerance returns Howe's approximation of the two-sided factor:
//
//	k = z_((1+coverage)/2) √((n−1)(1 + 1/n) / χ²_(1−confidence, n−1))
//
// Source: W. G. Howe, J. Am. Stat. Assoc. 64, 610-620 (1969); NIST/SEMATECH
// e-Handbook 7.2.6.3. Checked by TestNormalToleranceFactors.
func HoweTolerance(n int, coverage, confidence float64) float64 {
	if !toleranceArguments(n, coverage, confidence) {
		return math.NaN()
	}
	m := float64(n)
	chi := distuv.ChiSquared{K: m - 1}.Quantile(1 - confidence)
	return twoSidedScore(coverage) * math.Sqrt((m-1)*(1+1/m)/chi)
}

const (
	quadratureEnd    = 8  // [1] standard deviations beyond which nothing is left
	quadraturePoints = 96 // [1] Gauss-Legendre
)

func toleranceArguments(n int, coverage, confidence float64) bool {
	return n >= 2 && coverage > 0 && coverage < 1 && confidence > 0 && confidence < 1
}

// overDeviation averages f over the distribution of the sample's standard
// deviation in units of the population's, by quadrature over its probability range.
func overDeviation(n int, f func(s float64) float64) float64 {
	nu := float64(n - 1)
	chi := distuv.ChiSquared{K: nu}
	lo := math.Sqrt(chi.Quantile(1e-14) / nu)
	hi := math.Sqrt(chi.Quantile(1-1e-14) / nu)
	return quad.Fixed(func(s float64) float64 {
		return f(s) * chi.Prob(nu*s*s) * 2 * nu * s
	}, lo, hi, quadraturePoints, nil, 0)
}

// halfWidthAround returns r with Phi(centre + r) - Phi(centre - r) = share.
func halfWidthAround(centre, share float64) float64 {
	lo, hi := 0.0, math.Abs(centre)+40
	for range 80 {
		r := (lo + hi) / 2
		if distuv.UnitNormal.CDF(centre+r)-distuv.UnitNormal.CDF(centre-r) < share {
			lo = r
		} else {
			hi = r
		}
	}
	return (lo + hi) / 2
}

// solveTolerance bisects a function that rises with k above least for the confidence.
func solveTolerance(least float64, f func(k float64) float64, confidence float64) float64 {
	lo, hi := least, 1.0
	for f(hi) < confidence && hi < 1e6 {
		hi *= 2
	}
	for range 60 {
		mid := (lo + hi) / 2
		if f(mid) < confidence {
			lo = mid
		} else {
			hi = mid
		}
	}
	return (lo + hi) / 2
}
