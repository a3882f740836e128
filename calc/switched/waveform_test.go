package switched

import (
	"math"
	"testing"
)

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
