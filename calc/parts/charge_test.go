package parts

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/integrate/quad"
	"pgregory.net/rapid"

	"railproof/calc/internal/calctest"
)

func TestSwitchChargeScaling(t *testing.T) {
	m := &MOSFET{GateSwitchCharge: 3.2e-9, GateSwitchChargeAt: 20}
	calctest.Close(t, "at the test voltage", m.SwitchChargeAt(20), 3.2e-9, 1e-15)
	calctest.Close(t, "four times the voltage, twice the charge", m.SwitchChargeAt(80), 6.4e-9, 1e-15)
	// Depletion width of an abrupt junction grows as √V: ∫ C dv with C ∝ 1/√V.
	integral := quad.Fixed(func(u float64) float64 { return 2 }, 0, math.Sqrt(47), 8, nil, 0) // v = u², dv = 2u du, C = 1/u
	unit := quad.Fixed(func(u float64) float64 { return 2 }, 0, math.Sqrt(20), 8, nil, 0)
	calctest.Close(t, "by integration", m.SwitchChargeAt(47)/3.2e-9, integral/unit, 1e-12)
}

// TestOutputEnergyIsIntegralOfCharge integrates v dQ of each form numerically.
func TestOutputEnergyIsIntegralOfCharge(t *testing.T) {
	forms := map[string]*MOSFET{
		"square root":        {OutputCharge: 14e-9, OutputChargeAt: 20},
		"table":              {OutputChargeTable: table(0, 0, 2, 6e-9, 10, 11e-9, 40, 18e-9)},
		"table from 5 V":     {OutputChargeTable: table(5, 8e-9, 40, 18e-9)},
		"table of one point": {OutputChargeTable: table(20, 14e-9)},
	}
	for name, m := range forms {
		t.Run(name, func(t *testing.T) {
			for _, v := range []float64{0.5, 2, 3, 5, 12, 24, 40, 60} {
				q, e := m.OutputAt(v)
				// E = V Q − ∫ Q dv, with v = u² to tame the root at zero.
				area := 0.0
				const pieces = 4000
				for i := range pieces {
					a, b := math.Sqrt(v)*float64(i)/pieces, math.Sqrt(v)*float64(i+1)/pieces
					area += quad.Fixed(func(u float64) float64 { q, _ := m.OutputAt(u * u); return q * 2 * u }, a, b, 3, nil, 0)
				}
				calctest.Close(t, "energy", e, v*q-area, 1e-6)
			}
		})
	}
}

func TestConstantCapacitanceStoresHalfCVSquared(t *testing.T) {
	m := &MOSFET{OutputChargeTable: table(0, 0, 30, 30e-9)} // 1 nF
	for _, v := range []float64{10, 30, 50} {
		q, e := m.OutputAt(v)
		calctest.Close(t, "charge", q, 1e-9*v, 1e-12)
		calctest.Close(t, "energy", e, 0.5e-9*v*v, 1e-12)
	}
}

func TestDiodeJunctionCharge(t *testing.T) {
	d := &Diode{JunctionCharge: 9e-9, JunctionAt: 20}
	q, e := d.JunctionChargeAt(45)
	calctest.Close(t, "charge", q, 13.5e-9, 1e-12)
	calctest.Close(t, "energy", e, 13.5e-9*15, 1e-12)
}

func TestOutputChargeProperties(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		x := []float64{0, 0, 0}
		y := []float64{0, 0, 0}
		for i := 1; i < 3; i++ {
			x[i] = x[i-1] + rapid.Float64Range(0.5, 30).Draw(t, "dv")
			y[i] = y[i-1] + rapid.Float64Range(1e-11, 1e-8).Draw(t, "dq")
		}
		m := &MOSFET{OutputChargeTable: table(x[0], y[0], x[1], y[1], x[2], y[2])}
		v := rapid.Float64Range(0, 80).Draw(t, "v")
		q, e := m.OutputAt(v)
		if !(e >= 0 && e <= q*v*(1+1e-12)) {
			t.Fatalf("charge %g at %g V stores %g J, beyond Q V", q, v, e)
		}
		q2, e2 := m.OutputAt(v + 1)
		if q2 < q || e2 < e {
			t.Fatalf("charge or energy falls with voltage: %g %g, %g %g", q, q2, e, e2)
		}
	})
}
