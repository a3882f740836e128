package parts

import "math"

// Pieces returns the number of pieces in the bank; an unset count is one.
func (c *Capacitor) Pieces() float64 { return float64(max(c.Count, 1)) }

// CapacitanceAt returns the bank's small-signal capacitance [F] at a direct
// voltage, a temperature and an age.
//
//	C = n · C0 · b(|V|) · m(T) · a(age)
//
// Losses of capacitance multiply. Every multiplier is literal within its table;
// beyond, bias goes on falling with its last slope and none goes below
// MultiplierFloor.
//
// Checked against bias losses printed in TI data sheets SLUSF22, SLVSGP3A and
// SLVSHH9, and onsemi NCP3170/D p. 16.
func (c *Capacitor) CapacitanceAt(bias, degC, age float64) float64 {
	return c.CapacitanceAged(age) * c.CapacitanceMultiplierAt(bias, degC)
}

// CapacitanceAged returns the bank's capacitance [F] at an age, unbiased and at
// 25 °C: n C0 a(age) of CapacitanceAt.
func (c *Capacitor) CapacitanceAged(age float64) float64 {
	y, _ := overTemperature(&c.CapacitanceAgeing, age)
	return c.Pieces() * c.Capacitance * y
}

// CapacitanceMultiplierAt returns what bias [V] and temperature leave of it [1]:
// b(|V|) m(T) of CapacitanceAt.
func (c *Capacitor) CapacitanceMultiplierAt(bias, degC float64) float64 {
	y, _ := overTemperature(&c.CapacitanceTemp, degC)
	return y * overBias(&c.CapacitanceAtBias, math.Abs(bias))
}

// unbiased is the bank's capacitance [F] at zero volts.
func (c *Capacitor) unbiased(degC, age float64) float64 {
	y, _ := overTemperature(&c.CapacitanceTemp, degC)
	return c.CapacitanceAged(age) * y
}

// ESRAt returns the bank's series resistance [ohm] at a temperature and an age,
// and its slope over temperature [ohm/K].
//
//	R = ESR/n · m(T) · a(age)
func (c *Capacitor) ESRAt(degC, age float64) (r, slope float64) {
	r = c.ESRAged(age)
	y, dy := c.ESRMultiplierAt(degC)
	return r * y, r * dy
}

// ESRAged returns the bank's series resistance [ohm] at an age and 25 °C:
// ESR/n a(age) of ESRAt.
func (c *Capacitor) ESRAged(age float64) float64 {
	y, _ := overTemperature(&c.ESRAgeing, age)
	return c.ESR / c.Pieces() * y
}

// ESRMultiplierAt returns the series resistance over that at 25 °C and its slope
// [1/K]: m(T) of ESRAt.
func (c *Capacitor) ESRMultiplierAt(degC float64) (y, slope float64) {
	return overTemperature(&c.ESRTemp, degC)
}

// BankESL returns the bank's series inductance [H].
func (c *Capacitor) BankESL() float64 { return c.ESL / c.Pieces() }

// ChargeBetween returns the charge [C] that the bank takes from voltage v0 to v1:
// ∫ C(v) dv with the small-signal capacitance over bias. Signed.
func (c *Capacitor) ChargeBetween(v0, v1, degC, age float64) float64 {
	q := func(v float64) float64 {
		s, _ := biasMoments(&c.CapacitanceAtBias, 0, math.Abs(v))
		return math.Copysign(s, v)
	}
	return c.unbiased(degC, age) * (q(v1) - q(v0))
}

// EnergyBetween returns the energy [J] that the bank takes from voltage v0 to v1:
// ∫ v C(v) dv. Hold-up and large steps use it; ½ C V² with the biased C is not
// the energy of a class 2 ceramic.
func (c *Capacitor) EnergyBetween(v0, v1, degC, age float64) float64 {
	_, e0 := biasMoments(&c.CapacitanceAtBias, 0, math.Abs(v0))
	_, e1 := biasMoments(&c.CapacitanceAtBias, 0, math.Abs(v1))
	return c.unbiased(degC, age) * (e1 - e0)
}

// CapacitanceBetween returns the mean capacitance [F] that a large step between
// two voltages sees; for a vanishing step the small-signal value.
func (c *Capacitor) CapacitanceBetween(v0, v1, degC, age float64) float64 {
	if math.Abs(v1-v0) <= 1e-9*(math.Abs(v0)+math.Abs(v1)) {
		return c.CapacitanceAt(v0, degC, age)
	}
	return c.ChargeBetween(v0, v1, degC, age) / (v1 - v0)
}
