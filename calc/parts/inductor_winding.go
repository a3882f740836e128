package parts

// CopperSlope is the relative change of copper resistance per kelvin, referred to
// ReferenceDegC.
//
// IEC 60028 gives 0.00393/K referred to 20 °C (remembered, unverified);
// 0.00393/(1 + 0.00393·5) = 0.003854 refers it to 25 °C.
const CopperSlope = 0.00393 / (1 + 0.00393*5) // [1/K]

// CopperMultiplier returns the resistance of copper relative to 25 °C and its
// slope [1/K].
//
//	R(T)/R25 = 1 + 0.003854/K · (T − 25 °C) = (T + 234.45 °C)/(259.45 °C)
//
// Valid from about −200 °C to 200 °C; colder, it stays at MultiplierFloor.
func CopperMultiplier(degC float64) (y, slope float64) {
	y = 1 + CopperSlope*(degC-ReferenceDegC)
	if y < MultiplierFloor {
		return MultiplierFloor, 0
	}
	return y, CopperSlope
}

// DCResistanceAt returns the winding's DC resistance [ohm] at a winding
// temperature and its slope [ohm/K]: DCResistance · CopperMultiplier.
func (l *Inductor) DCResistanceAt(windingDegC float64) (r, slope float64) {
	y, dy := CopperMultiplier(windingDegC)
	return l.DCResistance * y, l.DCResistance * dy
}

// CoreMultiplierAt returns the core-loss multiplier at a core temperature and its
// slope [1/K]; the Steinmetz coefficients hold where it is 1. Beyond the table's
// ends it goes on with the last slope, not below MultiplierFloor.
func (c *Core) CoreMultiplierAt(coreDegC float64) (y, slope float64) {
	return overTemperature(&c.Temp, coreDegC)
}
