package switched

import "testing"

// buoy is a 24 V to 5 V, 6 A stage at 500 kHz with the given number of banks.
func buoy(banks int) *Circuit {
	c := &Circuit{Vin: 24, Period: 2e-6, Phases: 1, Banks: banks, Current: 6}
	c.Leg = Leg{L: 6.5e-6, Winding: 7e-3, HighSide: 9e-3, Rectifier: Rectifier{Slope: 7e-3}}
	c.Bank = [MaxBanks]Bank{{72e-6, 0.75e-3}, {220e-6, 18e-3}, {10e-6, 2e-3}, {1e-6, 8e-3}, {470e-6, 30e-3}, {0.1e-6, 20e-3}}
	return c
}

func light(c *Circuit) *Circuit {
	c.Current = 0.1
	c.Leg.Rectifier = Rectifier{Threshold: 0.42, Slope: 0.02, Blocks: true}
	return c
}

func BenchmarkSolve(b *testing.B) {
	run := func(name string, c *Circuit, duty float64) {
		b.Run(name, func(b *testing.B) {
			var s Solver
			var sol Solution
			b.ReportAllocs()
			for b.Loop() {
				if duty > 0 {
					s.FixedDuty(c, duty, &sol)
				} else {
					s.Regulated(c, 5, 0.01, 0.95, &sol)
				}
			}
			if !sol.Status.OK() {
				b.Fatal(sol.Status)
			}
		})
	}
	for _, banks := range []int{1, 2, 3, 6} {
		n := string(rune('0' + banks))
		run("fixed/ccm/banks="+n, buoy(banks), 0.2132)
		run("regulated/ccm/banks="+n, buoy(banks), 0)
		run("fixed/dcm/banks="+n, light(buoy(banks)), 0.1)
		run("regulated/dcm/banks="+n, light(buoy(banks)), 0)
	}
	for name, c := range map[string]*Circuit{"ccm/banks=1": buoy(1), "dcm/banks=1": light(buoy(1)), "ccm/banks=3": buoy(3)} {
		b.Run("approach/"+name, func(b *testing.B) {
			var s Solver
			var sol Solution
			s.Regulated(c, 5, 0.01, 0.95, &sol)
			for b.Loop() {
				s.Approach(c, 5, 0.01, 0.95, &sol)
			}
		})
	}
	four := buoy(2)
	four.Phases = 4
	run("fixed/ccm/phases=4/banks=2", four, 0.2132)
}
