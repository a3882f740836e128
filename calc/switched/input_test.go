package switched

import (
	"math"
	"testing"

	"railproof/calc/internal/calctest"
)

// The closed form for one input bank against the solver for several, and two
// equal banks against one of twice the capacitance and half the resistance.
func TestInputBanksAgree(t *testing.T) {
	for name, c := range map[string]*Circuit{
		"ccm": buoy(1), "dcm": light(buoy(1)), "reverse": func() *Circuit { c := buoy(1); c.Current = 0.1; return c }(),
		"three output banks": buoy(3), "dcm three": light(buoy(3)),
	} {
		t.Run(name, func(t *testing.T) {
			var s Solver
			var sol Solution
			s.Regulated(c, 5, 0.01, 0.9, &sol)
			if sol.Status != Solved {
				t.Fatal(sol.Status)
			}
			var one, two, shared InputSolution
			bank := [MaxBanks]Bank{{20e-6, 5e-3}}
			if !s.InputBanks(c, &sol, 1, &bank, &one) {
				t.Fatal("one")
			}
			s.shareInput(c, &sol, 1, &bank, &shared)
			calctest.Close(t, "ripple, closed form", one.RipplePP, shared.RipplePP, 1e-10)
			calctest.Close(t, "rms, closed form", one.BankRMS[0], shared.BankRMS[0], 1e-10)
			bank = [MaxBanks]Bank{{10e-6, 10e-3}, {10e-6, 10e-3}}
			if !s.InputBanks(c, &sol, 2, &bank, &two) {
				t.Fatal("two")
			}
			calctest.Close(t, "ripple, two", two.RipplePP, one.RipplePP, 1e-10)
			calctest.Close(t, "rms, two", 2*two.BankRMS[1], one.BankRMS[0], 1e-10)
			if !(one.RMS > 0 && math.Abs(one.RMS-one.BankRMS[0]) < 1e-12) {
				t.Error("total", one.RMS)
			}
		})
	}
}
