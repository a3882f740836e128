package parts

import "math"

const (
	lifeHalving   = 10.0           // [K] a rise that halves the life
	riseValidity  = 40.0           // [K] ripple rise at which the ripple rule's life is zero
	boltzmannInEV = 8.617333262e-5 // [eV/K]
	zeroCelsiusK  = 273.15         // [K]
)

// RippleRise returns the rise [K] of a piece's core over its surroundings by
// ripple current, from its rating.
//
//	ΔT = ΔT0 · [I/(F · I0)]²
//
//	I   [A] RMS current of one piece: the bank's over its count
//	I0  [A] rated ripple current, F [1] frequency factor of the series
//	ΔT0 [K] rise at rated ripple, about 5 K
//
// NaN if the ripple rating is unknown.
//
// Source: Rubycon, life calculation formula for aluminium electrolytic capacitors.
func (c *Capacitor) RippleRise(bankRMS float64) float64 {
	x := bankRMS / (c.Pieces() * c.Life.FrequencyFactor * c.Rating.RippleCurrent)
	return c.Life.RatedRise * x * x
}

// HasLife reports whether the part wears out by the electrolytic rule and states
// an endurance.
func (c *Capacitor) HasLife() bool {
	return c.Kind == AluminiumElectrolytic && Known(c.Life.Rated) && Known(c.Rating.TemperatureDegC)
}

// LifeAt returns the expected life [s] at the temperature of the surroundings and
// a core rise over them by ripple; NaN unless HasLife.
//
//	L = L0 · 2^[(T0 − Ta)/10 K] · 2^[ΔT0/(10 − 0.25 ΔT0) − ΔT/(10 − 0.25 ΔT)]
//
//	L0 [s]  endurance at the rated temperature T0 and rated ripple
//	Ta [°C] surroundings: ambient plus what other parts add, without own heating
//	ΔT [K]  RippleRise, or a rise from the thermal resistance
//
// At rated ripple the second factor is one. Valid for surroundings of about 60 to
// 105 °C and ΔT below 40 K, where the rule's life reaches zero; beyond, zero is
// returned. Makers cap the claim, often at 15 years.
//
// Source: Rubycon, life calculation formula. Checked by power-stage case ps-th-04.
func (c *Capacitor) LifeAt(surroundingsDegC, rise float64) float64 {
	if !c.HasLife() {
		return Unknown
	}
	return c.Life.Rated * math.Exp2((c.Rating.TemperatureDegC-surroundingsDegC)/lifeHalving) *
		rippleFactor(c.Life.RatedRise, rise)
}

func rippleFactor(rated, rise float64) float64 {
	if rise >= riseValidity {
		return 0
	}
	weight := func(k float64) float64 { return k / (lifeHalving - 0.25*k) }
	return math.Exp2(weight(rated) - weight(rise))
}

// LifeAtCore returns the life [s] at a core temperature by the plain rule, life
// halved by every 10 K.
//
//	L = L0 · 2^[(T0 − T)/10 K]
//
// Valid from about 60 to 105 °C. Checked by power-stage case ps-th-03 (COSEL).
func LifeAtCore(rated, ratedDegC, coreDegC float64) float64 {
	return rated * math.Exp2((ratedDegC-coreDegC)/lifeHalving)
}

// MixedLife returns the life [s] over a profile: consumed fractions add, so lives
// combine as the harmonic mean weighted by the share of time. lives and shares
// are equally long; the shares need not sum to one.
func MixedLife(lives, shares []float64) float64 {
	total, consumed := 0.0, 0.0
	for i, share := range shares {
		total += share
		consumed += share / lives[i]
	}
	return total / consumed
}

// ArrheniusAcceleration returns by how much life at a temperature exceeds that at
// the rated one.
//
//	exp[Ea/k · (1/T − 1/T0)], T in kelvin
//
//	ea [eV] activation energy
//
// Doubling per 10 K is Ea = 0.81 eV between 90 and 100 °C and 0.70 eV between 65
// and 75 °C: the two rules agree at one temperature only. Boltzmann constant by
// the SI definition of 2019.
func ArrheniusAcceleration(ea, ratedDegC, degC float64) float64 {
	return math.Exp(ea / boltzmannInEV * (1/(degC+zeroCelsiusK) - 1/(ratedDegC+zeroCelsiusK)))
}
