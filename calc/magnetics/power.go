package magnetics

import "math"

// Steinmetz exponents are real, and core loss stands in the inner loop of an
// evaluation. binaryLog and binaryPower replace math.Log and math.Exp there: a
// table of 128 centres and a short polynomial each, under half the time. Their error
// is below 4.5e-16: of the logarithm absolute within [-1, 1] and relative beyond,
// of the power relative. Compared with math in TestPowerKernels.

const (
	tableBits = 7
	tableSize = 1 << tableBits
	mantissa  = 52
)

var (
	logCentre [tableSize]struct{ inverse, log float64 }
	powCentre [tableSize]float64
)

func init() {
	for i := range tableSize {
		c := 1 + (float64(i)+0.5)/tableSize
		logCentre[i].inverse, logCentre[i].log = 1/c, -math.Log2(1/c)
		powCentre[i] = math.Exp2(float64(i) / tableSize)
	}
}

// binaryLog returns log2(x) for a normal x > 0.
//
// With m in [1, 2) the mantissa and c the centre of its cell, r = m/c − 1 is at
// most 1/257, and the series of ln(1+r) to the sixth power leaves r⁷/7 < 1e-17.
func binaryLog(x float64) float64 {
	b := math.Float64bits(x)
	e := int(b>>mantissa) - 1023
	m := math.Float64frombits(b&(1<<mantissa-1) | 1023<<mantissa)
	t := &logCentre[b>>(mantissa-tableBits)&(tableSize-1)]
	r := m*t.inverse - 1
	s := r * r
	series := r - s/2 + s*r*(1.0/3-r/4+s*(1.0/5-r/6))
	return float64(e) + (t.log + series*math.Log2E)
}

// binaryPower returns 2^y. The rest beyond the nearest 1/128 is at most 1/256, and
// the series of e^(r ln 2) to the fifth power leaves 6e-19.
func binaryPower(y float64) float64 {
	if !(y > -1000 && y < 1000) {
		return math.Exp2(y)
	}
	n := int(y*tableSize+(1000*tableSize+0.5)) - 1000*tableSize
	r := (y - float64(n)/tableSize) * math.Ln2
	series := 1 + r*(1+r*(1.0/2+r*(1.0/6+r*(1.0/24+r/120))))
	t := math.Float64bits(powCentre[n&(tableSize-1)])
	return math.Float64frombits(t+uint64(n>>tableBits)<<mantissa) * series
}
