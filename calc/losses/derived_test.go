package losses

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/integrate/quad"

	"railproof/calc/internal/calctest"
	"railproof/calc/parts"
)

// Mechanisms without a published example are derived; each is integrated here
// from voltages, currents and charges instead.

func integral(f func(float64) float64, a, b float64) float64 {
	sum, n := 0.0, 500
	for i := range n {
		sum += quad.Fixed(f, a+(b-a)*float64(i)/float64(n), a+(b-a)*float64(i+1)/float64(n), 4, nil, 0)
	}
	return sum
}

// TestOutputChargeLossByIntegration follows the charge: the own capacitance is
// discharged through the channel, its energy is burnt; the partner's is charged
// through the channel, which drops Vin − v at each bit of charge.
func TestOutputChargeLossByIntegration(t *testing.T) {
	const f = 5e5
	hs := parts.MOSFET{OutputCharge: 14e-9, OutputChargeAt: 20}
	ls := parts.MOSFET{OutputCharge: 25e-9, OutputChargeAt: 15}
	for _, vin := range []float64{5, 24, 60} {
		_, own := hs.OutputAt(vin)
		q, e := ls.OutputAt(vin)
		got := OutputChargeLoss(vin, f, own, q, e)
		// v = u² makes C dv = q0/√v0 du smooth at zero.
		discharge := integral(func(u float64) float64 { return u * u * 14e-9 / math.Sqrt(20) }, 0, math.Sqrt(vin))
		charge := integral(func(u float64) float64 { return (vin - u*u) * 25e-9 / math.Sqrt(15) }, 0, math.Sqrt(vin))
		calctest.Close(t, "square-root charges", got, f*(discharge+charge), 1e-9)
	}
}

// TestLeakageByIntegration integrates v i over one period: the diode blocks Vin
// while the high side is on.
func TestLeakageByIntegration(t *testing.T) {
	const vin, duty, period, ir = 24.0, 0.3, 2e-6, 3e-3
	energy := integral(func(float64) float64 { return vin * ir }, 0, duty*period)
	calctest.Close(t, "leakage", LeakageLoss(duty, vin, ir), energy/period, 1e-12)
}

// TestWindingByIntegration splits a triangular current into mean and ripple.
func TestWindingByIntegration(t *testing.T) {
	const dcr, rac, duty, mean, ripple = 7e-3, 3.0, 0.21, 6.0, 1.4
	wave := func(x float64) float64 {
		if x < duty {
			return ripple * (x/duty - 0.5)
		}
		return ripple * (0.5 - (x-duty)/(1-duty))
	}
	over := func(f func(float64) float64) float64 { return integral(f, 0, duty) + integral(f, duty, 1) }
	meanSquare := over(func(x float64) float64 { return square(mean + wave(x)) })
	alternating := over(func(x float64) float64 { return rac * dcr * square(wave(x)) })
	calctest.Close(t, "ac item", WindingACLoss(dcr, rac, mean, meanSquare), alternating, 1e-9)
	calctest.Close(t, "both items at rac 1 are the circuit's", WindingDCLoss(dcr, mean)+WindingACLoss(dcr, 1, mean, meanSquare), dcr*meanSquare, 1e-12)
}

// TestOverlapByIntegration integrates v i over both edges: while the current rises
// the full voltage stands, and while the voltage falls the full current flows.
func TestOverlapByIntegration(t *testing.T) {
	const vin, f, on, off, ton, toff = 24.0, 5e5, 5.4, 6.6, 3e-9, 1.9e-9
	edge := func(i, t, split float64) float64 {
		ramp := integral(func(x float64) float64 { return vin * i * x / (split * t) }, 0, split*t)
		return ramp + integral(func(x float64) float64 { return vin * i * (1 - x/((1-split)*t)) }, 0, (1-split)*t)
	}
	for _, split := range []float64{0.2, 0.5, 0.7} {
		calctest.Close(t, "overlap", OverlapLoss(vin, f, on, off, ton, toff), f*(edge(on, ton, split)+edge(off, toff, split)), 1e-9)
	}
	if p := OverlapLoss(vin, f, -2, off, ton, toff); p != vin*f*off*toff/2 {
		t.Errorf("a reversed current turns on softly: %g", p)
	}
	if p := OverlapLoss(vin, f, -3, -1, ton, toff); p != 0 {
		t.Errorf("reversed throughout: %g", p)
	}
	if !math.IsNaN(Transition(3e-9, 3, 0)) || !math.IsNaN(Transition(3e-9, 3, -0.5)) {
		t.Error("a drive that does not exceed the plateau has no transition time")
	}
}

// TestDeadTimeByIntegration integrates the body diode's loss and the channel loss
// that it replaces over both intervals.
func TestDeadTimeByIntegration(t *testing.T) {
	const f, td, vsd, on, off = 5e5, 3e-8, 0.85, 5.4, 6.6
	diode := integral(func(float64) float64 { return vsd * on }, 0, td) + integral(func(float64) float64 { return vsd * off }, 0, td)
	calctest.Close(t, "body diode", DeadTimeLoss(f, td, vsd, on)+DeadTimeLoss(f, td, vsd, off), f*diode, 1e-12)
	channel := integral(func(float64) float64 { return on * on }, 0, td) + integral(func(float64) float64 { return off * off }, 0, td)
	calctest.Close(t, "channel", DeadTimeShare(f, td, on, off), f*channel, 1e-12)
	if DeadTimeLoss(f, td, vsd, -2) != DeadTimeLoss(f, td, vsd, 2) {
		t.Error("a reversed current heats a body diode as much")
	}
}

// TestPathsByIntegration integrates copper losses of a board path.
func TestPathsByIntegration(t *testing.T) {
	const r, period = 1.5e-3, 2e-6
	wave := func(x float64) float64 { return 6 + 0.7*math.Sin(2*math.Pi*x/period) }
	meanSquare := integral(func(x float64) float64 { return square(wave(x)) }, 0, period) / period
	energy := integral(func(x float64) float64 { return r * wave(x) * wave(x) }, 0, period)
	calctest.Close(t, "copper path", Resistive(r, meanSquare), energy/period, 1e-12)
}

func TestBandsHoldOne(t *testing.T) {
	for m := range MechanismCount {
		if b := ModelBand(m); !(b.Low > 0 && b.Low <= 1 && b.High >= 1 && b.High < 10) {
			t.Errorf("%s: band %g to %g", m, b.Low, b.High)
		}
	}
}
