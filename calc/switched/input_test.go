package switched

import (
	"math"
	"testing"

	"pgregory.net/rapid"

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

// The closed form for two unequal banks against the solver for any number, and how
// often it serves.
func TestInputPair(t *testing.T) {
	var served, asked int
	rapid.Check(t, func(t *rapid.T) {
		c := buoy(rapid.IntRange(1, 3).Draw(t, "output banks"))
		switch rapid.SampledFrom([]string{"ccm", "dcm", "reverse", "two phases"}).Draw(t, "mode") {
		case "dcm":
			c = light(c)
		case "reverse":
			c.Current = 0.1
		case "two phases":
			c.Phases = 2
		}
		c.Vin = rapid.Float64Range(7, 40).Draw(t, "input")
		draw := func(name string, least, greatest float64) float64 {
			return least * math.Pow(greatest/least, rapid.Float64Range(0, 1).Draw(t, name))
		}
		bank := [MaxBanks]Bank{
			{C: draw("C1", 1e-6, 1e-4), ESR: draw("r1", 1e-4, 0.1)},
			{C: draw("C2", 1e-6, 1e-3), ESR: draw("r2", 1e-4, 1)},
		}
		var s Solver
		var sol Solution
		s.Regulated(c, 5, 0.01, 0.95, &sol)
		if sol.Status != Solved {
			t.Skip("a draw whose output the input cannot reach")
		}
		want := InputSolution{RMS: math.Sqrt(sol.InputRMS*sol.InputRMS - sol.InputMean*sol.InputMean)}
		got := want
		s.prepare(c)
		if s.settle(c, sol.Duty) != Solved {
			t.Skip("a draw without a periodic state at that duty ratio")
		}
		asked++
		if !s.sharePair(&sol, &bank, &got) {
			return
		}
		served++
		s.nw.input.set(2, &bank, sol.InputMean) // keeps shareInput from the closed form
		s.nw.n = s.nw.phases + s.nw.banks + 2
		s.closed = false
		if !s.shareInput(c, &sol, 2, &bank, &want) {
			t.Fatal("not solved")
		}
		if math.Abs(got.RipplePP-want.RipplePP) > 1e-10*want.RipplePP {
			t.Fatalf("ripple: got %.12g V, want %.12g V", got.RipplePP, want.RipplePP)
		}
		for k := range 2 {
			if math.Abs(got.BankRMS[k]-want.BankRMS[k]) > 5e-9*want.RMS {
				t.Fatalf("bank %d: got %.12g A, want %.12g A of %g A", k, got.BankRMS[k], want.BankRMS[k], want.RMS)
			}
		}
	})
	t.Logf("the closed form served %d of %d", served, asked)
	if 5*served < asked { // half of them, give or take
		t.Error("the closed form hardly serves")
	}
}
