package corners

import "math"

// Capability is how far limits lie from a distribution, in units of its width.
// A side without a limit is NaN, and so is Cp then.
type Capability struct {
	Cp    float64 // [1] (USL - LSL) / 6s
	Upper float64 // [1] (USL - mean) / 3s
	Lower float64 // [1] (mean - LSL) / 3s
	Cpk   float64 // [1] the lesser of Upper and Lower
}

// CapabilityOf returns the indices for limits lsl and usl (NaN: none).
//
//	Cp = (USL − LSL)/6s,  Cpk = min(USL − m, m − LSL)/3s
//
// Meant for near-normal data; for a skewed or truncated one use PercentileCapability.
//
// Source: NIST/SEMATECH e-Handbook 6.1.6. Checked by TestCapabilityHandbookExample.
func CapabilityOf(mean, deviation, lsl, usl float64) Capability {
	return capability((usl-lsl)/(6*deviation), (usl-mean)/(3*deviation), (mean-lsl)/(3*deviation))
}

// PercentileCapability takes the 0.135 %, 50 % and 99.865 % quantiles in the place
// of mean minus 3s, mean and mean plus 3s, so that it holds for any shape.
//
// Source: NIST/SEMATECH e-Handbook 6.1.6, non-normal data.
func PercentileCapability(low, median, high, lsl, usl float64) Capability {
	return capability((usl-lsl)/(high-low), (usl-median)/(high-median), (median-lsl)/(median-low))
}

func capability(cp, upper, lower float64) Capability {
	c := Capability{Cp: cp, Upper: upper, Lower: lower}
	switch {
	case math.IsNaN(upper):
		c.Cpk = lower
	case math.IsNaN(lower):
		c.Cpk = upper
	default:
		c.Cpk = min(upper, lower)
	}
	return c
}
