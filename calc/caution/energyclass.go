package caution

import "math"

// Limits of IEC 62368-1, tables 4 and 5 (third edition, 2018), as read in a
// written copy of the tables.
const (
	es1DC = 60.0  // [V] steady, ES1
	es2DC = 120.0 // [V] steady, ES2
)

// ES1Ratio returns the use of the ES1 limit by a direct voltage with an
// alternating voltage on it; ES1 holds at 1 or below.
//
//	r = Udc/60 V + Uac/Ulim(f)
//
//	udc   [V]  direct voltage
//	uac   [V]  peak of the alternating part
//	f     [Hz] its frequency
//	Ulim  [V]  42.4 to 1 kHz, 42.4 + 0.566 f/kHz to 100 kHz, 99 above
//
// Valid for steady voltages. Source: IEC 62368-1, 3rd edition, 2018, table 4.
// Checked by TestReference/safe-01.
func ES1Ratio(udc, uac, f float64) float64 {
	limit := 99.0
	switch {
	case f <= 1e3:
		limit = 42.4
	case f <= 1e5:
		limit = 42.4 + 0.566*f/1e3
	}
	return math.Abs(udc)/es1DC + uac/limit
}

// es1Charged holds the ES1 limits of a charged capacitor, capacitance falling.
var es1Charged = []struct{ c, u float64 }{
	{300e-9, 60}, {170e-9, 75}, {91e-9, 100}, {61e-9, 125}, {41e-9, 150}, {28e-9, 200}, {18e-9, 250}, {12e-9, 350}, {8e-9, 500},
}

// ES1ChargedCapacitor returns the voltage [V] up to which a charged capacitor
// counts as ES1; c [F] is its capacitance with the upper tolerance.
// Linear between the rows of the table; 60 V from 300 nF on, 500 V below 8 nF.
//
// Source: IEC 62368-1, 3rd edition, 2018, table 5. Checked by
// TestReference/safe-02.
func ES1ChargedCapacitor(c float64) float64 {
	rows := es1Charged
	if !(c < rows[0].c) {
		return rows[0].u
	}
	for i := 1; i < len(rows); i++ {
		if c >= rows[i].c {
			hi, lo := rows[i-1], rows[i]
			return hi.u + (lo.u-hi.u)*(hi.c-c)/(hi.c-lo.c)
		}
	}
	return rows[len(rows)-1].u
}

// Energy returns the energy [J] of a capacitor c [F] charged to v [V]: C V²/2.
// Checked by TestReference/safe-03.
func Energy(c, v float64) float64 { return c * v * v / 2 }

// BleedTime returns the time [s] in which a resistor r [ohm] discharges a
// capacitor c [F] from v0 [V] to v1 [V]: R C ln(V0/V1); 0 where v0 <= v1.
// Checked by TestReference/safe-03.
func BleedTime(r, c, v0, v1 float64) float64 {
	if v0 <= v1 {
		return 0
	}
	return r * c * math.Log(v0/v1)
}
