package switched

import (
	"math"
	"testing"

	"railproof/calc/internal/calctest"
)

// ideal is a stage whose parts are as good as lossless: resistances of 1 nohm,
// a capacitor so large that its voltage stands still.
func ideal(vin, f, l float64) *Circuit {
	c := &Circuit{Vin: vin, Period: 1 / f, Phases: 1, Banks: 1}
	c.Leg = Leg{L: l, Winding: 1e-9, HighSide: 1e-9, Rectifier: Rectifier{Slope: 1e-9}}
	c.Bank[0] = Bank{C: 1, ESR: 1e-9}
	return c
}

func solveFixed(t *testing.T, c *Circuit, duty float64) *Solution {
	t.Helper()
	var s Solver
	sol := new(Solution)
	s.FixedDuty(c, duty, sol)
	if sol.Status != Solved {
		t.Fatalf("status %d at duty %g", sol.Status, duty)
	}
	if !(sol.EnergyBalance <= 1e-9) {
		t.Errorf("energy balance %g", sol.EnergyBalance)
	}
	return sol
}

// ps-sz-16. D. W. Hart, Power Electronics (McGraw-Hill 2011), Example 6-1: 50 V,
// duty 0.4, 400 uH, 100 uF, 20 kHz, 20 ohm give 20 V, 0.25 A to 1.75 A, and a
// ripple of 0.469 %. The printed figures neglect the output ripple's action on
// the current, which moves them by 2e-4.
func TestHartContinuous(t *testing.T) {
	c := ideal(50, 20e3, 400e-6)
	c.Bank[0] = Bank{C: 100e-6, ESR: 1e-9}
	c.Conductance = 1. / 20
	sol := solveFixed(t, c, 0.4)
	calctest.Close(t, "output", sol.OutputMean, 20, 1e-8)
	calctest.Within(t, "greatest current", sol.Leg.Peak, 1.75, 1e-3)
	calctest.Within(t, "least current", sol.Leg.Valley, 0.25, 1e-3)
	calctest.Within(t, "ripple", (sol.OutputMax-sol.OutputMin)/sol.OutputMean, 0.00469, 6e-6)
}

// ps-sz-17. Hart, Example 6-9: 24 V, duty 0.4, 200 uH, 10 kHz, 20 ohm in
// discontinuous conduction give a conduction fraction 0.29 and 13.9 V; exactly
// 13.91510153 V and 2.016979694 A without ripple.
func TestHartDiscontinuous(t *testing.T) {
	c := ideal(24, 10e3, 200e-6)
	c.Conductance = 1. / 20
	c.Leg.Rectifier.Blocks = true
	sol := solveFixed(t, c, 0.4)
	if sol.Leg.Mode != Discontinuous {
		t.Error("mode", sol.Leg.Mode)
	}
	calctest.Close(t, "output", sol.OutputMean, 13.91510153, 1e-6)
	calctest.Close(t, "peak", sol.Leg.Peak, 2.016979694, 1e-6)
	calctest.Close(t, "conduction", sol.Leg.Conduct, 0.2898979486, 1e-6)
}

// ps-sz-19. Erickson and Maksimovic, Fundamentals of Power Electronics, ch. 5:
// at the boundary load the ratio of conversion is the duty ratio from either
// side; at ten times its resistance it is 0.7227926565.
func TestConversionRatioAtTheBoundary(t *testing.T) {
	const d, r = 0.35, 12.30769231
	for _, k := range []struct{ r, want, tol float64 }{{r * (1 - 1e-7), d, 1e-6}, {r * (1 + 1e-7), d, 1e-6}, {10 * r, 0.7227926565, 1e-8}} {
		c := ideal(10, 400e3, 10e-6)
		c.Conductance = 1 / k.r
		c.Leg.Rectifier.Blocks = true
		sol := solveFixed(t, c, d)
		calctest.Close(t, "conversion", sol.OutputMean/10, k.want, k.tol)
	}
}

// ps-sz-20, derived there: ripple of one capacitor with ESR for a triangular
// current of 3 A at duty 0.3 and 500 kHz, one case for each place the extremes
// can stand in.
func TestRippleOfOneCapacitor(t *testing.T) {
	for _, k := range []struct{ esr, want float64 }{{0.001, 0.007857142857}, {0.005, 0.01542857143}, {0.05, 0.15}} {
		c := ideal(1e4, 500e3, 1e4*0.3*0.7/(3*500e3)) // so high an input that the slopes are straight
		c.Bank[0] = Bank{C: 100e-6, ESR: k.esr}
		c.Current = 10
		sol := solveFixed(t, c, 0.3)
		calctest.Close(t, "ripple current", sol.Leg.Peak-sol.Leg.Valley, 3, 1e-5)
		calctest.Close(t, "ripple", sol.OutputMax-sol.OutputMin, k.want, 1e-4)
	}
}

// ps-wm-01. Erickson and Maksimovic, appendix A: root-mean-square values of the
// segments, for 10 A with 4 A of ripple at duty 0.25.
func TestRMSForms(t *testing.T) {
	c := ideal(16, 1e5, 16*0.25*0.75/(4*1e5))
	c.Current = 10
	sol := solveFixed(t, c, 0.25)
	calctest.Close(t, "inductor", sol.Leg.Inductor.RMS, 10.06644591, 1e-8)
	calctest.Close(t, "high side", sol.Leg.HighSide.RMS, 5.033222957, 1e-8)
	calctest.Close(t, "low side", sol.Leg.Rectifier.RMS, 8.717797887, 1e-8)
	calctest.Close(t, "output capacitor", sol.BankRMS[0], 1.154700538, 1e-6)
	calctest.Close(t, "input capacitor", math.Sqrt(sol.InputRMS*sol.InputRMS-sol.InputMean*sol.InputMean), 4.368447474, 1e-8)
	// 5 A peak, on for 0.3 of the period, rectifier for 0.2: Vin − V : V = 2 : 3
	c = ideal(10, 1e5, 4*0.3/(5*1e5))
	c.Current = 1.25
	c.Leg.Rectifier.Blocks = true
	sol = solveFixed(t, c, 0.3)
	calctest.Close(t, "resting, rms", sol.Leg.Inductor.RMS, 2.041241452, 1e-6)
	calctest.Close(t, "resting, mean", sol.Leg.Inductor.Mean, 1.25, 1e-9)
	calctest.Close(t, "resting, conduction", sol.Leg.Conduct, 0.2, 1e-6)
}

// ps-wm-02. Texas Instruments SLUU195, eq. 4 to 7: four phases at duty 0.107.
// The guide prints 3.41 A of summed ripple; its 3.18 A of input RMS current is
// one phase's share, the ideal value is 12.3697211 A without ripple.
func TestFourPhaseRipple(t *testing.T) {
	c := ideal(1.5/0.107, 420e3, 0.6e-6)
	c.Phases, c.Current = 4, 100
	c.Bank[0].ESR = 1e-3 // large against the capacitance: the ripple is the current's
	sol := solveFixed(t, c, 0.107)
	calctest.Close(t, "summed ripple", (sol.OutputMax-sol.OutputMin)/1e-3, 3.404761905, 2e-3)
	calctest.Close(t, "one phase", sol.Leg.Peak-sol.Leg.Valley, 5.31547619, 2e-3)
	c.Leg.L *= 1e4
	sol = solveFixed(t, c, 0.107)
	calctest.Close(t, "input", math.Sqrt(sol.InputRMS*sol.InputRMS-sol.InputMean*sol.InputMean), 12.3697211, 1e-5)
}

// ps-wm-03. Linear Technology LTC3729 p. 25, LTC3731 p. 26, LTC3861 p. 24: where
// the input RMS current of several phases peaks and vanishes, and the summed
// inductor ripple over Vin/(L f).
func TestMultiphaseNullsAndPeaks(t *testing.T) {
	for _, k := range []struct {
		n           int
		duty, input float64
		ripple      float64 // NaN: not given
	}{{1, 0.5, 0.5, math.NaN()}, {2, 0.25, 0.25, 0.125}, {2, 0.75, 0.25, math.NaN()}, {2, 0.5, 0, 0}, {3, 1. / 6, 1. / 6, math.NaN()}, {3, 0.5, 1. / 6, math.NaN()}} {
		c := ideal(12, 1e5, 1)
		c.Phases, c.Current = k.n, 10
		c.Bank[0].ESR = 1e-3
		sol := solveFixed(t, c, k.duty)
		calctest.Within(t, "input", math.Sqrt(math.Max(0, sol.InputRMS*sol.InputRMS-sol.InputMean*sol.InputMean))/10, k.input, 2e-6)
		if !math.IsNaN(k.ripple) {
			calctest.Within(t, "ripple", (sol.OutputMax-sol.OutputMin)/1e-3/(12/(1*1e5)), k.ripple, 1e-4)
		}
	}
}

// Common practice, no published source: a diode-rectified stage from 12 V at
// duty 0.5, 25 kHz, 143 uH with 20 mohm, 200 uF with 1 mohm, 1 ohm, a MOSFET of
// low drop and a Schottky diode delivers about 5.6 V, not 6 V, with almost 0.9 A
// of inductor ripple (ideally 0.8 A) and about 23 mV of output ripple (20 mV).
func TestCommonPracticeDiodeStage(t *testing.T) {
	c := &Circuit{Vin: 12, Period: 1 / 25e3, Phases: 1, Banks: 1, Conductance: 1}
	c.Leg = Leg{L: 143e-6, Winding: 20e-3, HighSide: 10e-3, Rectifier: Rectifier{Threshold: 0.4, Slope: 20e-3, Blocks: true}}
	c.Bank[0] = Bank{C: 200e-6, ESR: 1e-3}
	sol := solveFixed(t, c, 0.5)
	calctest.Within(t, "output", sol.OutputMean, 5.6, 0.06)
	calctest.Within(t, "inductor ripple", sol.Leg.Peak-sol.Leg.Valley, 0.88, 0.02)
	calctest.Within(t, "output ripple", sol.OutputMax-sol.OutputMin, 23e-3, 1.5e-3)
}
