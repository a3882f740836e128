package parts

import (
	"math"
	"testing"

	"railproof/calc/internal/calctest"
	"railproof/calc/numeric"
)

// model is one temperature-dependent behaviour with its slope, and what physics
// says of it.
type model struct {
	name      string
	at        func(x float64) (y, slope float64)
	low, high float64   // [any] validity as documented; the suite looks beyond both
	kinks     []float64 // where the slope jumps
	rises     int       // 1 monotonically, -1 falls, 0 unsaid
	zero      bool      // may be zero
}

func table(xy ...float64) numeric.Table {
	var t numeric.Table
	for i := 0; i < len(xy); i += 2 {
		t.X, t.Y = append(t.X, xy[i]), append(t.Y, xy[i+1])
	}
	return t
}

func models() []model {
	m := &MOSFET{OnResistance: 9e-3, OnResistanceTemp: table(-40, 0.8, 25, 1, 125, 1.45), OnResistanceDrive: table(3, 1.5, 5, 1, 10, 0.85)}
	bare := &MOSFET{OnResistance: 9e-3}
	d := &Diode{Threshold: 0.42, Slope: 0.02, ThresholdTemp: -1.2e-3, Leakage: table(25, 2e-5, 75, 5e-4, 125, 8e-3)}
	l := &Inductor{DCResistance: 7e-3, Core: Core{Temp: table(25, 1.3, 90, 1, 120, 1.1)}}
	c := &Capacitor{Count: 2, ESR: 0.05, ESRTemp: table(-40, 8, 20, 1, 105, 0.6), ESRAgeing: table(0, 1, 1, 2)}
	return []model{
		{"on-resistance", func(x float64) (float64, float64) { return m.OnResistanceAt(x, 5) }, -40, 125, []float64{25}, 1, false},
		{"on-resistance/weak drive", func(x float64) (float64, float64) { return m.OnResistanceAt(x, 2.5) }, -40, 125, []float64{25}, 1, false},
		{"on-resistance/no table", func(x float64) (float64, float64) { return bare.OnResistanceAt(x, 5) }, -40, 150, nil, 1, false},
		{"threshold", d.ThresholdAt, -40, 150, []float64{375}, -1, true},
		{"leakage", d.LeakageAt, 25, 125, []float64{75}, 1, false},
		{"copper", CopperMultiplier, -200, 200, nil, 1, false},
		{"winding", l.DCResistanceAt, -200, 200, nil, 1, false},
		{"core", l.Core.CoreMultiplierAt, 25, 120, []float64{90}, 0, false},
		{"series resistance", func(x float64) (float64, float64) { return c.ESRAt(x, 0.5) }, -40, 105, []float64{20}, -1, false},
	}
}

// TestModels runs the suite over every temperature-dependent model.
func TestModels(t *testing.T) {
	for _, m := range models() {
		t.Run(m.name, func(t *testing.T) { checkModel(t, m) })
	}
}

func checkModel(t *testing.T, m model) {
	span := m.high - m.low
	last, lastX := math.NaN(), math.NaN()
	for i := range 601 {
		x := m.low - span + 3*span*float64(i)/600
		y, slope := m.at(x)
		if !(y > 0 || m.zero && y == 0) || math.IsInf(y, 0) || math.IsNaN(slope) || math.IsInf(slope, 0) {
			t.Fatalf("at %g: %g, slope %g: must be finite and positive", x, y, slope)
		}
		if m.rises != 0 && float64(m.rises)*(y-last) < -1e-12*math.Abs(y) {
			t.Errorf("from %g to %g: goes %g to %g against physics", lastX, x, last, y)
		}
		last, lastX = y, x
		checkSlope(t, m, x, slope)
	}
	for _, end := range []float64{m.low, m.high} {
		in, _ := m.at(end)
		out, _ := m.at(end + 1e-9)
		calctest.Close(t, "continuous across the limit of validity", out, in, 1e-8)
	}
}

// checkSlope compares with a central difference away from the kinks.
func checkSlope(t *testing.T, m model, x, slope float64) {
	t.Helper()
	const h = 1e-3
	a, sa := m.at(x - h)
	b, sb := m.at(x + h)
	if math.Abs(sb-sa) > 1e-3*(math.Abs(sa)+math.Abs(sb)) {
		for _, k := range append(m.kinks, m.low, m.high) {
			if math.Abs(x-k) <= 2*h {
				return
			}
		}
		if a <= 0.11*b || b <= 0.11*a || sa == 0 || sb == 0 { // the floor begins between
			return
		}
	}
	numerical := (b - a) / (2 * h)
	if math.Abs(numerical-slope) > 1e-6*math.Abs(slope)+1e-9*math.Abs(a) {
		t.Errorf("at %g: slope %g, central difference %g", x, slope, numerical)
	}
}

func TestLiteralMultipliers(t *testing.T) {
	m := &MOSFET{OnResistance: 10e-3, OnResistanceTemp: table(25, 1.1, 125, 1.6)}
	r, slope := m.OnResistanceAt(25, 5)
	calctest.Close(t, "a table is not renormalised", r, 11e-3, 1e-15)
	calctest.Close(t, "slope", slope, 10e-3*0.005, 1e-12)
	r, _ = m.OnResistanceAt(225, 5)
	calctest.Close(t, "goes on with the last slope when hot", r, 21e-3, 1e-12)
	r, _ = m.OnResistanceAt(-273, 5)
	calctest.Close(t, "stays positive when cold", r, 1e-3, 1e-12)

	c := &Core{Temp: table(25, 0.05, 100, 0.04)}
	y, _ := c.CoreMultiplierAt(25)
	calctest.Close(t, "the floor does not lift what the table states", y, 0.05, 1e-15)
	y, _ = c.CoreMultiplierAt(400)
	calctest.Close(t, "nor falls below its end", y, 0.04, 1e-15)
}

func TestLeakageDoublesAtConstantRate(t *testing.T) {
	d := &Diode{Leakage: table(25, 2e-5, 125, 8e-3)}
	at := func(x float64) float64 { i, _ := d.LeakageAt(x); return i }
	calctest.Close(t, "at the first point", at(25), 2e-5, 1e-12)
	calctest.Close(t, "at the last point", at(125), 8e-3, 1e-12)
	calctest.Close(t, "geometric mean in the middle", at(75), math.Sqrt(2e-5*8e-3), 1e-12)
	calctest.Close(t, "same rate beyond", at(175)/at(125), at(125)/at(75), 1e-12)

	touching := &Diode{Leakage: table(0, 0, 100, 1e-3)}
	i, slope := touching.LeakageAt(50)
	calctest.Close(t, "linear where a point is zero", i, 5e-4, 1e-12)
	calctest.Close(t, "its slope", slope, 1e-5, 1e-12)
	if i, slope = touching.LeakageAt(-10); i != 0 || slope != 0 {
		t.Errorf("below zero leakage: %g, slope %g", i, slope)
	}
	none := &Diode{}
	if i, _ = none.LeakageAt(500); i != 0 {
		t.Errorf("no table: leakage %g", i)
	}
	one := &Diode{Leakage: table(25, 1e-4)}
	if i, slope = one.LeakageAt(90); i != 1e-4 || slope != 0 {
		t.Errorf("one point: %g, slope %g", i, slope)
	}
}
