package parts

// OnResistanceAt returns the on-resistance [ohm] at a junction temperature and a
// gate drive voltage, and its slope over temperature [ohm/K].
//
//	Rdson(Tj, Vdr) = R25 · m(Tj) · g(Vdr)
//
//	R25  [ohm] OnResistance, at 25 °C and the drive voltage of the data sheet
//	m(T) [1]   OnResistanceTemp, literal; 1 if absent
//	g(V) [1]   OnResistanceDrive, literal; 1 if absent
//
// Beyond its ends m goes on with the last slope (so that a runaway is found and
// not hidden), towards the cold not below MultiplierFloor. Beyond tells when.
//
// Low-voltage parts follow m = 1 + 0.005/K (Tj − 25 °C): Linear Technology,
// LTC3855 data sheet 3855f, p. 22; LTC3728 data sheet 3728fg, p. 28.
// High-voltage parts reach 2 to 2.6 at their limit.
func (m *MOSFET) OnResistanceAt(junctionDegC, drive float64) (r, slope float64) {
	y, dy := m.OnMultiplierAt(junctionDegC)
	r = m.OnResistanceDriven(drive)
	return r * y, r * dy
}

// OnMultiplierAt returns the on-resistance over that at 25 °C and its slope
// [1/K]: m(Tj) of OnResistanceAt.
func (m *MOSFET) OnMultiplierAt(junctionDegC float64) (y, slope float64) {
	return overTemperature(&m.OnResistanceTemp, junctionDegC)
}

// OnResistanceDriven returns the on-resistance at 25 °C [ohm] and a gate drive
// voltage [V]: R25 g(Vdr) of OnResistanceAt. Beyond its ends the table goes on
// with the last slope as over temperature: a weaker drive goes on raising the
// resistance.
func (m *MOSFET) OnResistanceDriven(drive float64) float64 {
	if m.OnResistanceDrive.Empty() {
		return m.OnResistance
	}
	y, _ := overTemperature(&m.OnResistanceDrive, drive)
	return m.OnResistance * y
}
