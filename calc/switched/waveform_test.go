package switched

import (
	"math"
	"testing"

	"railproof/calc/internal/calctest"
)

// Edges stand twice, the samples span one period and close it, their means are
// the solution's, the currents of equal phases are one another's delayed by an
// N-th, and the switch node steps between input and ground.
func TestWaveform(t *testing.T) {
	three := buoy(2)
	three.Phases, three.Current = 3, 18
	for name, c := range map[string]*Circuit{"ccm": buoy(1), "dcm": light(buoy(2)), "three phases": three} {
		t.Run(name, func(t *testing.T) {
			var s Solver
			var sol Solution
			s.Regulated(c, 5, 0, 1, &sol)
			w, ok := s.Waveform(c, &sol, 1200)
			if !ok {
				t.Fatal("no waveform")
			}
			n := len(w.Time)
			if n < 1200 || n > 1240 {
				t.Errorf("%d points", n)
			}
			calctest.Close(t, "span", w.Time[n-1]-w.Time[0], c.Period, 1e-13)
			calctest.Close(t, "output closes", w.Output[n-1], w.Output[0], 1e-12)
			output, bank, inductor, input := 0.0, 0.0, 0.0, 0.0
			steps := 0
			for k := 1; k < n; k++ {
				dt := w.Time[k] - w.Time[k-1]
				if dt < 0 {
					t.Fatal("time runs backwards")
				}
				if dt == 0 {
					steps++
					calctest.Close(t, "output at an edge", w.Output[k], w.Output[k-1], 1e-12)
				}
				output += dt * (w.Output[k] + w.Output[k-1]) / 2
				bank += dt * (w.BankCurrent[0][k] + w.BankCurrent[0][k-1]) / 2
				inductor += dt * (w.Inductor[0][k] + w.Inductor[0][k-1]) / 2
				input += dt * (w.Input[k] + w.Input[k-1]) / 2
			}
			if steps < 1 {
				t.Error("no edge stands twice")
			}
			calctest.Close(t, "output", output/c.Period, sol.OutputMean, 1e-7)
			calctest.Within(t, "bank charge", bank/c.Period, 0, 1e-4*sol.BankRMS[0])
			calctest.Close(t, "inductor", inductor/c.Period, sol.Leg.Inductor.Mean, 1e-5)
			calctest.Close(t, "input", input/c.Period, sol.InputMean, 1e-5)
			calctest.Close(t, "node while on", w.SwitchNode[0][0], c.Vin-c.Leg.HighSide*w.Inductor[0][0], 1e-14)
			least, most := math.Inf(1), math.Inf(-1)
			for k := range n {
				least, most = math.Min(least, w.Inductor[0][k]), math.Max(most, w.Inductor[0][k])
			}
			calctest.Within(t, "valley", least, sol.Leg.Valley, 1e-9)
			calctest.Within(t, "peak", most, sol.Leg.Peak, 1e-9)
			for p := 1; p < c.Phases; p++ {
				at := float64(p) / float64(c.Phases) * c.Period
				for k := range n {
					if math.Abs(w.Time[k]-at) < 1e-12*c.Period {
						calctest.Close(t, "delayed", w.Inductor[p][k], w.Inductor[0][0], 1e-11)
					}
				}
			}
		})
	}
}

func TestIdleWaveform(t *testing.T) {
	c := light(buoy(2))
	c.Current = 0
	var s Solver
	var sol Solution
	s.FixedDuty(c, 0.3, &sol)
	w, ok := s.Waveform(c, &sol, 100)
	if !ok || w.Output[1] != 24 || w.Inductor[0][1] != 0 {
		t.Error(ok, w)
	}
	var in InputSolution
	if !s.InputBanks(c, &sol, 2, &[MaxBanks]Bank{{1e-6, 1}, {1e-6, 1}}, &in) || in.RipplePP != 0 {
		t.Error(in)
	}
}

// The input banks' sampled currents have the RMS and the node the ripple that
// InputBanks computes exactly; the samples are dense, and the trapezoid between
// them good to their square.
func TestWaveformOfInputBanks(t *testing.T) {
	for _, phases := range []int{1, 3} {
		c := &Circuit{
			Vin: 24, Period: 2e-6, Phases: phases, Banks: 1, Current: 6,
			Leg:  Leg{L: 6e-6, Winding: 7e-3, HighSide: 9e-3, Rectifier: Rectifier{Slope: 5e-3}},
			Bank: [MaxBanks]Bank{{C: 80e-6, ESR: 1e-3}},
		}
		inputs := [MaxBanks]Bank{{C: 15e-6, ESR: 1e-3}, {C: 100e-6, ESR: 0.1}}
		var s Solver
		var sol Solution
		s.Regulated(c, 5, 0, 1, &sol)
		if !sol.Status.OK() {
			t.Fatalf("status %d", sol.Status)
		}
		var exact InputSolution
		if !s.InputBanks(c, &sol, 2, &inputs, &exact) {
			t.Fatal("input banks not solved")
		}
		w, ok := s.WaveformWithInput(c, &sol, 4000, 2, &inputs)
		if !ok {
			t.Fatal("no waveform")
		}
		for b := range 2 {
			square := 0.0
			for k := 1; k < len(w.Time); k++ {
				x, y := w.InputCurrent[b][k-1], w.InputCurrent[b][k]
				square += (w.Time[k] - w.Time[k-1]) * (x*x + x*y + y*y) / 3
			}
			if rms := math.Sqrt(square / c.Period); math.Abs(rms-exact.BankRMS[b]) > 1e-5*exact.RMS {
				t.Errorf("%d phases, bank %d: sampled RMS %g, exact %g", phases, b, rms, exact.BankRMS[b])
			}
		}
		least, most := math.Inf(1), math.Inf(-1)
		for _, v := range w.InputNode {
			least, most = math.Min(least, v), math.Max(most, v)
		}
		if pp := most - least; math.Abs(pp-exact.RipplePP) > 1e-4*exact.RipplePP {
			t.Errorf("%d phases: sampled ripple %g, exact %g", phases, pp, exact.RipplePP)
		}
	}
}
