package sizing

import (
	"fmt"
	"math"
	"math/cmplx"

	"railproof/calc/parts"
)

// bank is a kind of capacitor under the conditions of the requirement, before its
// pieces are counted.
type bank struct {
	make  *capacitorMake
	piece parts.Capacitor // the largest single piece
	left  float64         // [1] least of the rated capacitance that is left
	grown float64         // [1] greatest series resistance over the rated one
	tau   float64         // [s] greatest ESR times least capacitance, of any number of pieces
	bias  float64         // [V] greatest direct voltage
}

// newBank returns a kind of capacitor under a direct voltage. Capacitance is taken
// at its least and series resistance at its greatest over ambient and self-heating,
// age and tolerance.
func (z *sizer) newBank(kind parts.CapacitorKind, bias, stress, fs float64, field string) (bank, bool) {
	b := bank{make: makeOf(kind), bias: bias}
	b.piece = b.make.piece(stress, fs, z.choice.CapacitorSeries)
	if math.IsNaN(b.piece.Rating.Voltage) {
		z.conflict("voltage-rating", b.make.derating*stress, b.make.ratings[len(b.make.ratings)-1], "V", "no capacitor of the kind is sold for this voltage with its derating", field)
		return b, false
	}
	b.left, b.grown = z.worstOf(&b.piece, bias)
	b.tau = b.left * b.piece.Capacitance * b.grown * b.piece.ESR
	return b, true
}

// worstOf returns the least of the capacitance and the greatest of the series
// resistance over the rated values of one piece.
func (z *sizer) worstOf(p *parts.Capacitor, bias float64) (left, grown float64) {
	left, grown = math.Inf(1), 0
	for _, degC := range [3]float64{z.req.AmbientDegC.Min, parts.ReferenceDegC, z.req.AmbientDegC.Max + selfHeating} {
		for _, age := range [2]float64{0, 1} {
			esr, _ := p.ESRAt(degC, age)
			left = math.Min(left, p.CapacitanceAt(bias, degC, age)/(p.Capacitance*p.Pieces()))
			grown = math.Max(grown, esr/p.ESR*p.Pieces())
		}
	}
	return left * (1 - capacitanceTol), grown * (1 + seriesTol)
}

// mostCount is the greatest number of pieces in a bank that anybody would place.
const mostCount = 1000.0 // [1]

// fill returns the bank with enough pieces for a rated capacitance and a ripple
// current [A], each piece as small as the series allows. field is the target behind
// the capacitance.
func (b *bank) fill(z *sizer, rated, rms, fs float64, field string) parts.Capacitor {
	count := math.Max(1, math.Max(math.Ceil(rated/b.piece.Capacitance*(1-1e-9)), math.Ceil(rms/b.piece.Rating.RippleCurrent)))
	if !(count <= mostCount) {
		z.conflict("capacitor-count", math.Min(count, math.MaxFloat32), mostCount, "1", "more of the largest pieces of the kind than a bank holds", field, "load/max_a")
		count = mostCount
	}
	p := b.make.pieceOf(math.Min(b.piece.Capacitance, z.choice.CapacitorSeries.AtLeast(rated/count)), b.piece.Rating.Voltage, fs)
	p.Count = int(count)
	return p
}

// least returns the least capacitance of a filled bank [F].
func (b *bank) least(p *parts.Capacitor) float64 { return b.left * p.Capacitance * p.Pieces() }

// most returns the greatest series resistance of a filled bank [ohm].
func (b *bank) most(p *parts.Capacitor) float64 { return b.grown * p.ESR / p.Pieces() }

// chargeBound is a bound of the form C = (Q + τ ΔI)/ΔV: a charge and the drop across
// the series resistance within one voltage, added, which is cautious.
type chargeBound struct {
	Bound
	charge  float64 // [C]
	current float64 // [A] whose drop is added
	allowance
}

// allowance is the voltage that a bound has to keep, and how it follows.
type allowance struct {
	within  float64 // [V]
	field   string  // target behind it
	formula string  // in symbols
	inputs  []Input
}

// chargeBound completes a bound for the bank. charge is a formula for Q.
func (b *bank) chargeBound(constraint string, charge string, q, current float64, a allowance, ideal float64, c Corner, source string, inputs ...Input) chargeBound {
	v := (q + b.tau*current) / a.within
	return chargeBound{
		charge: q, current: current, allowance: a,
		Bound: Bound{
			Side: AtLeast, Constraint: constraint, Field: a.field, Value: v, Factor: b.left, Part: v / b.left, Ideal: ideal, Corner: c,
			Formula: fmt.Sprintf("C = (%s + tau * dI) / %s", charge, a.formula),
			Inputs:  append(append(inputs, Input{"tau", b.tau, "s"}, Input{"dI", current, "A"}), a.inputs...),
			Source:  source,
		},
	}
}

// mostShare returns the greatest share of a ripple current of frequency fs that
// output bank k carries: its admittance over that of all, its own capacitance and
// resistance at the ends that draw more, the others' at those that draw less.
func (z *sizer) mostShare(k int, fs float64) float64 {
	var all, own complex128
	for j := range z.draft.OutputCapacitors {
		c := &z.draft.OutputCapacitors[j]
		left, grown := z.worstOf(c, z.voHigh)
		if j == k {
			esr, _ := c.ESRAt(z.req.AmbientDegC.Max+selfHeating, 0)
			left, grown = 1+capacitanceTol, (1-seriesTol)*math.Min(1, esr*c.Pieces()/c.ESR)
		}
		y := complex(c.Pieces(), 0) / complex(c.ESR*grown, -1/(2*math.Pi*fs*c.Capacitance*left))
		all += y
		if j == k {
			own = y
		}
	}
	return math.Min(1, cmplx.Abs(own/all))
}
