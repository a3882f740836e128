package sizing

import (
	"math"

	"railproof/calc/parts"
)

// corner is one whole operating point in closed form, in continuous conduction.
// Quantities are compared between whole points, so that no figure mixes ends that
// cannot coincide.
type corner struct {
	Corner
	bridge  float64 // [V] at the input capacitors
	i       float64 // [A] mean inductor current of one phase
	on, off float64 // [V] across the inductor in either interval
	duty    float64 // [1]
}

// at returns the operating point; hot carries the greatest drops, cold none but the
// diode's threshold. NaN throughout where the source cannot deliver the power.
func (z *sizer) at(vin, vo, io float64, hot bool) corner {
	c := corner{Corner: Corner{Input: vin, Output: vo, Load: io, Frequency: z.fsLow, Hot: hot}}
	drops, power := Drops{Threshold: z.drops.Threshold}, vo*io
	if hot {
		drops, power = z.drops, vo*io*(1+z.lossShare)
	}
	c.bridge = bridgeVoltage(vin, z.source, power)
	c.i = io / z.phases
	c.on, c.off = inductorVoltages(c.bridge, vo, c.i, drops)
	c.duty = DropDuty(c.bridge, vo, c.i, drops)
	c.Duty = c.duty
	return c
}

// bridgeVoltage returns the voltage behind a source resistance that delivers power.
//
//	V = (Vin + sqrt(Vin² − 4 R P))/2
//
// The upper of the two solutions of V (Vin − V)/R = P; NaN where the source cannot
// deliver the power at all. Source: circuit of source and constant power, derived.
func bridgeVoltage(vin, source, power float64) float64 {
	return (vin + math.Sqrt(vin*vin-4*source*power)) / 2
}

// flux returns the volt-seconds of one interval [Vs] at a switching frequency.
func (c *corner) flux(fs float64) float64 { return c.off * (1 - c.duty) / fs }

// swing returns valley and peak of the inductor current [A] of the draft's inductor
// at its least inductance and the least frequency.
func (z *sizer) swing(c *corner) (valley, peak float64) {
	return z.leastL.SwingAbout(c.i, c.flux(z.fsLow))
}

// summed returns the ripple [A] and rising fraction that the output capacitors see,
// at phases times the switching frequency, from the ripple of one phase.
func (z *sizer) summed(c *corner, ripple float64) (sum, rising float64) {
	if z.phases == 1 {
		return ripple, c.duty
	}
	rising = z.phases * c.duty
	rising -= math.Floor(rising)
	return ripple * InterleavedRipple(int(z.phases), c.duty) / (c.duty * (1 - c.duty)), rising
}

// loads selects the ends of the load range that a search looks at.
type loads uint8

const (
	bothLoads loads = iota
	greatestLoad
	leastLoad
)

// Steps of the search over the input voltage. Between the points of the grid the
// figures searched have one extremum at most: they are smooth but for the nulls of
// interleaved phases, of which a range of 1 to 20 holds few.
const (
	inputSteps = 25 // [1]
	goldSteps  = 24 // [1] shrinks a grid step by 1e5
)

// worst returns the operating point with the greatest figure over the input range,
// both ends of the output tolerance, the loads selected, hot and cold. The input
// voltage is searched inside its range, because input ripple and RMS have their
// worst case there. NaN figures are passed over.
func (z *sizer) worst(l loads, figure func(*corner) float64) (corner, float64) {
	best, most := corner{}, math.Inf(-1)
	currents := [2]float64{z.req.LoadCurrent.Max, z.req.LoadCurrent.Min}
	from, to := 0, 2
	switch l {
	case greatestLoad:
		to = 1
	case leastLoad:
		from = 1
	}
	for _, io := range currents[from:to] {
		for _, vo := range [2]float64{z.voHigh, z.voLow} {
			for _, hot := range [2]bool{true, false} {
				c, v := z.worstInput(func(vin float64) corner { return z.at(vin, vo, io, hot) }, figure)
				if v > most*(1+1e-12) || most == math.Inf(-1) && v > most {
					best, most = c, v
				}
			}
		}
	}
	if math.IsInf(most, -1) {
		return corner{}, parts.Unknown
	}
	return best, most
}

// worstInput searches the input range: a grid, then golden section about its best
// point. An end of the range is kept unless the inside is truly worse.
func (z *sizer) worstInput(at func(float64) corner, figure func(*corner) float64) (corner, float64) {
	low, high := z.req.Input.Min, z.req.Input.Max
	best, most, bestK := corner{}, math.Inf(-1), 0
	step := (high - low) / (inputSteps - 1)
	try := func(vin float64, k int) float64 {
		c := at(vin)
		v := figure(&c)
		if v > most {
			best, most, bestK = c, v, k
		}
		return v
	}
	if step == 0 {
		try(low, 0)
		return best, most
	}
	try(high, inputSteps-1) // first, so that a flat figure is told at an end
	for k := range inputSteps - 1 {
		try(low+float64(k)*step, k)
	}
	if bestK == 0 || bestK == inputSteps-1 {
		return best, most
	}
	const gold = 0.6180339887498949
	a, b := low+float64(bestK-1)*step, low+float64(bestK+1)*step
	x1, x2 := b-gold*(b-a), a+gold*(b-a)
	y1, y2 := try(x1, bestK), try(x2, bestK)
	for range goldSteps {
		if y1 > y2 {
			b, x2, y2 = x2, x1, y1
			x1 = b - gold*(b-a)
			y1 = try(x1, bestK)
		} else {
			a, x1, y1 = x1, x2, y2
			x2 = a + gold*(b-a)
			y2 = try(x2, bestK)
		}
	}
	return best, most
}
