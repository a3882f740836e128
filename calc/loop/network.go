package loop

import (
	"math"

	"railproof/calc/parts"
	"railproof/calc/stage"
)

// want is what the network of a compensator is to do at the crossover.
type want struct {
	crossover float64 // [Hz]
	gain      float64 // [1] of the compensator there
	boost     float64 // [deg] phase above -90°
}

// network returns the parts of c's type that do what is wanted with an ideal
// amplifier; amplifier data are kept.
//
//	I    C1 = 1/(2π fc G R1)
//	II   C2 = 1/(2π fc G K R1), C1 = C2 (K²-1), R2 = K/(2π fc C1)
//	III  C2 = 1/(2π fc G R1), C1 = C2 (K-1), R2 = sqrt(K)/(2π fc C1),
//	     R3 = R1/(K-1), C3 = 1/(2π fc sqrt(K) R3)
//
// A transconductance amplifier's network stands to ground: C1 + C2 = gm k g K'/(2π fc G)
// with the divider k and the gain g and boost of the lead pair, K' from the boost
// that is left.
//
// Source: H. D. Venable, Powercon 10, 1983, for the op-amp forms; the others from
// CompensatorGain. Checked by TestReferenceLoop loop-10 and loop-11, where a
// printed example uses K for K-1 and so misses its phase margin by 3°.
func (w want) network(c parts.Compensator, f *stage.Feedback) parts.Compensator {
	wc := 2 * math.Pi * w.crossover
	r1 := f.Upper
	switch c.Type {
	case parts.OpAmpType1:
		c.FeedbackF = 1 / (wc * w.gain * r1)
	case parts.OpAmpType2:
		k := KFactorTwo(w.boost)
		c.ShuntF = 1 / (wc * w.gain * k * r1)
		c.FeedbackF = c.ShuntF * (k*k - 1)
		c.FeedbackOhm = k / (wc * c.FeedbackF)
	case parts.OpAmpType3:
		k := KFactorThree(w.boost)
		c.ShuntF = 1 / (wc * w.gain * r1)
		c.FeedbackF = c.ShuntF * (k - 1)
		c.FeedbackOhm = math.Sqrt(k) / (wc * c.FeedbackF)
		c.LeadOhm = r1 / (k - 1)
		c.LeadF = 1 / (wc * math.Sqrt(k) * c.LeadOhm)
	default:
		lead, raise := 0.0, 1.0
		if c.Type == parts.TransconductanceType3 {
			lead = min(w.boost/2, leadBound(f))
			pair := PlaceLead(w.crossover, lead)
			ratio := pair.Pole / pair.Zero
			both := f.Upper * f.Lower / (f.Upper + f.Lower)
			c.LeadOhm = (f.Upper - ratio*both) / (ratio - 1)
			if c.LeadOhm < leadNegligible*both {
				c.LeadOhm = 0 // all the lead that the divider allows: no resistor is left
			}
			c.LeadF = 1 / (2 * math.Pi * pair.Zero * (f.Upper + c.LeadOhm))
			raise = math.Sqrt(ratio)
		}
		k := KFactorTwo(w.boost - lead)
		sum := c.Transconductance * f.Lower / (f.Upper + f.Lower) * raise * k / (wc * w.gain)
		c.ShuntF = sum / (k * k)
		c.FeedbackF = sum - c.ShuntF
		c.FeedbackOhm = k / (wc * c.FeedbackF)
	}
	return c
}

// leadBound returns the greatest lead that a capacitor across the upper resistor
// of a divider can give, asin((r-1)/(r+1)) with r = 1 + Ru/Rl [deg].
func leadBound(f *stage.Feedback) float64 {
	r := 1 + f.Upper/f.Lower
	return degrees(math.Asin((r - 1) / (r + 1)))
}

const (
	leadNegligible = 1e-6 // [1] of the divider's resistance

	boostShare  = 0.95 // [1] of the theoretical boost that a buildable network reaches: K of a type II stays below 25
	leastTwo    = 5.0  // [deg] least boost of a network with zero and pole, so that they stay apart
	leastThree  = 20.0 // [deg] likewise for two zeros and two poles
	boostOfTwo  = 90.0 // [deg] theoretical, one zero and one pole
	boostOfBoth = 180.0
)

// boostRange returns the boost that a type can be asked for [deg].
func boostRange(t parts.CompensatorType, f *stage.Feedback) (least, greatest float64) {
	switch t {
	case parts.OpAmpType1:
		return 0, 0
	case parts.OpAmpType2, parts.TransconductanceType2:
		return leastTwo, boostShare * boostOfTwo
	case parts.OpAmpType3:
		return leastThree, boostShare * boostOfBoth
	}
	return leastTwo, boostShare*boostOfTwo + leadBound(f)
}

// Series rounds a part's value to one that can be bought.
type Series interface {
	Nearest(x float64) float64
}

// Rounding names the series of resistors and capacitors; nil leaves exact.
type Rounding struct {
	Resistors  Series
	Capacitors Series
}

// apply rounds the parts one after the other, each from those already rounded, so
// that corners and the gain at the crossover are kept as far as the series allow.
func (r Rounding) apply(c parts.Compensator, f *stage.Feedback, crossover float64) parts.Compensator {
	if r.Resistors == nil && r.Capacitors == nil {
		return c
	}
	resistor, capacitor := nearest(r.Resistors), nearest(r.Capacitors)
	exact := c
	gain := func(x *parts.Compensator) float64 {
		g := CompensatorGain(x, f, crossover)
		return math.Hypot(real(g), imag(g))
	}
	if c.LeadF > 0 && (c.Type == parts.OpAmpType3 || c.Type == parts.TransconductanceType3) {
		c.LeadF = capacitor(exact.LeadF)
		if exact.LeadOhm > 0 {
			c.LeadOhm = resistor(exact.LeadOhm * exact.LeadF / c.LeadF)
		}
	}
	scale := gain(&exact) / gain(&c)
	if c.Type == parts.OpAmpType1 {
		c.FeedbackF = capacitor(exact.FeedbackF / scale)
		return c
	}
	c.FeedbackOhm = resistor(exact.FeedbackOhm * scale)
	c.FeedbackF = capacitor(exact.FeedbackOhm * exact.FeedbackF / c.FeedbackOhm)
	if exact.ShuntF > 0 {
		pole := exact.FeedbackOhm * exact.FeedbackF * exact.ShuntF / (exact.FeedbackF + exact.ShuntF)
		c.ShuntF = capacitor(pole * c.FeedbackF / (c.FeedbackOhm*c.FeedbackF - pole))
	}
	return c
}

func nearest(s Series) func(float64) float64 {
	if s == nil {
		return func(x float64) float64 { return x }
	}
	return s.Nearest
}
