package spread

import "math"

// The standard normal quantile is tabulated against its smaller tail p: one
// segment per 1/32 of an octave of p, so that the step shrinks with the tail. A
// segment is the cubic through the ends' exact values and slopes.
//
// Error: below 6e-9 standard deviations for p from 1e-7 to 1/2, measured against
// an exact inversion, and below 1e-7 out to six. It needs neither logarithm nor
// root, which rational approximations take in the tails.
const (
	normalOctaves  = 32
	normalSegments = 32
	normalBits     = 5 // log2 of normalSegments
)

type cubic struct{ a, b, c, d float64 }

var normalTable = tabulateNormal()

func tabulateNormal() *[normalOctaves * normalSegments]cubic {
	t := new([normalOctaves * normalSegments]cubic)
	value := func(p float64) float64 { return -math.Sqrt2 * math.Erfinv(1-2*p) }
	slope := func(q float64) float64 { return math.Sqrt(2*math.Pi) * math.Exp(q*q/2) }
	for i := range t {
		octave, segment := i/normalSegments, i%normalSegments
		base := math.Ldexp(1, octave-normalOctaves-1)
		width := base / normalSegments
		lo := base + float64(segment)*width
		var y0, y1 float64
		if lo < 1e-3 {
			y0, y1 = tailQuantile(lo), tailQuantile(lo+width)
		} else {
			y0, y1 = value(lo), value(lo+width)
		}
		d0, d1 := slope(y0)*width, slope(y1)*width
		t[i] = cubic{y0, d0, 3*(y1-y0) - 2*d0 - d1, 2*(y0-y1) + d0 + d1}
	}
	return t
}

// tailQuantile solves Phi(q) = p for small p by Newton on the logarithm, where
// 1 - 2p would lose the tail's digits.
func tailQuantile(p float64) float64 {
	q := -math.Sqrt(-2 * math.Log(p))
	for range 50 {
		tail := math.Erfc(-q/math.Sqrt2) / 2
		step := (math.Log(tail) - math.Log(p)) * tail * math.Sqrt(2*math.Pi) * math.Exp(q*q/2)
		q -= step
		if math.Abs(step) < 1e-15*math.Abs(q) {
			break
		}
	}
	return q
}

// normalQuantile returns q with Phi(q) = p, for 2^-33 < p < 1 - 2^-33: a value's ends
// lie at most six standard deviations from its mode, where p is 1e-9.
func normalQuantile(p float64) float64 {
	// Without a branch on the half, which no processor predicts. The difference
	// costs the far tail digits: 5e-17 of p, 1e-8 of q at six standard deviations.
	// The factor keeps p = 1/2 inside the last segment.
	d := p - 0.5
	b := math.Float64bits((0.5 - math.Abs(d)) * (1 - 0x1p-53))
	// exponent and upper mantissa bits are the segment, the rest the place in it
	c := &normalTable[(b>>(52-normalBits)-(1023-normalOctaves-1)<<normalBits)%(normalOctaves*normalSegments)]
	s := float64(int64(b<<(12+normalBits)>>(12+normalBits))) * (1.0 / (1 << (52 - normalBits)))
	return math.Copysign(c.a+s*(c.b+s*(c.c+s*c.d)), d)
}

func normalDensity(x float64) float64 { return math.Exp(-x*x/2) / math.Sqrt(2*math.Pi) }

func normalBelow(x float64) float64 { return math.Erfc(-x/math.Sqrt2) / 2 }
