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
			again := one
			if !s.InputBanks(c, &sol, 1, &[MaxBanks]Bank{{20e-6, 5e-3}}, &again) || again != one {
				t.Error("one after two", again, one)
			}
			ranged := sol
			if s.OutputRange(&ranged); math.Abs(ranged.OutputMax-sol.OutputMax) > 1e-12 {
				t.Error("output range after two", ranged.OutputMax, sol.OutputMax)
			}
			calctest.Close(t, "rms, two", 2*two.BankRMS[1], one.BankRMS[0], 1e-10)
			if !(one.RMS > 0 && math.Abs(one.RMS-one.BankRMS[0]) < 1e-12) {
				t.Error("total", one.RMS)
			}
		})
	}
}

// Three unequal banks against stepping their own equations under the sampled
// input current until they repeat.
func TestInputBanksAgainstStepping(t *testing.T) {
	for name, c := range map[string]*Circuit{"ccm": buoy(1), "two phases": func() *Circuit { c := buoy(2); c.Phases = 2; return c }(), "dcm": light(buoy(2))} {
		t.Run(name, func(t *testing.T) {
			var s Solver
			var sol Solution
			s.Regulated(c, 5, 0.01, 0.9, &sol)
			bank := [MaxBanks]Bank{{4e-6, 4e-3}, {22e-6, 0.05}, {100e-6, 0.2}}
			var got InputSolution
			if !s.InputBanks(c, &sol, 3, &bank, &got) {
				t.Fatal("not solved")
			}
			w, _ := s.Waveform(c, &sol, 20000)
			var v, square [3]float64
			g := 0.0
			for _, b := range bank[:3] {
				g += 1 / b.ESR
			}
			node := func(i float64) float64 {
				sum := sol.InputMean - i
				for k := range v {
					sum += v[k] / bank[k].ESR
				}
				return sum / g
			}
			var least, most float64
			for range 40 {
				square = [3]float64{}
				least, most = math.Inf(1), math.Inf(-1)
				for k := 1; k < len(w.Time); k++ {
					dt := w.Time[k] - w.Time[k-1]
					// midpoint rule
					before := v
					at := node(w.Input[k-1])
					least, most = math.Min(least, at), math.Max(most, at)
					for b := range v {
						v[b] += dt / 2 * (at - before[b]) / bank[b].ESR / bank[b].C
					}
					at = node((w.Input[k-1] + w.Input[k]) / 2)
					for b := range v {
						j := (at - v[b]) / bank[b].ESR
						square[b] += dt * j * j
						v[b] = before[b] + dt*j/bank[b].C
					}
					at = node(w.Input[k])
					least, most = math.Min(least, at), math.Max(most, at)
				}
			}
			for b := range v {
				calctest.Close(t, "rms", got.BankRMS[b], math.Sqrt(square[b]/c.Period), 1e-5)
			}
			calctest.Close(t, "ripple", got.RipplePP, most-least, 1e-4)
		})
	}
}
