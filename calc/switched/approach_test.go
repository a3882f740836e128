package switched

import (
	"math"
	"testing"

	"railproof/calc/internal/calctest"
)

// From the solution of a circuit two per cent away, few steps reach what
// Regulated finds.
func TestApproachReachesRegulated(t *testing.T) {
	for name, c := range map[string]*Circuit{
		"ccm": buoy(1), "ccm, three banks": buoy(3), "dcm": light(buoy(1)), "dcm, two banks": light(buoy(2)),
		"dcm, three phases": func() *Circuit { c := light(buoy(2)); c.Phases, c.Current = 3, 0.3; return c }(),
		"resistor":          func() *Circuit { c := buoy(1); c.Current, c.Conductance = 1, 1; return c }(),
	} {
		t.Run(name, func(t *testing.T) {
			var s Solver
			var sol, want Solution
			e := *c
			e.Vin *= 1.02
			e.Leg.L *= 0.98
			e.Leg.HighSide *= 1.1
			s.Regulated(&e, 5, 0.01, 0.95, &sol)
			s.Regulated(c, 5, 0.01, 0.95, &want)
			steps, change := 0, 1.0
			for change > 1e-12 && steps < 10 {
				change = s.Approach(c, 5, 0.01, 0.95, &sol)
				steps++
			}
			s.OutputRange(&sol)
			if steps > 4 {
				t.Errorf("%d steps", steps)
			}
			if sol.Status != Solved || sol.Leg.Mode != want.Leg.Mode {
				t.Error(sol.Status, sol.Leg.Mode)
			}
			av, ai, aw := figures(&sol, c.Banks)
			bv, bi, bw := figures(&want, c.Banks)
			for n := range av {
				calctest.Within(t, "voltage", av[n], bv[n], 1e-11)
			}
			for n := range ai {
				calctest.Within(t, "current", ai[n], bi[n], 1e-10)
			}
			for n := range aw {
				calctest.Within(t, "power", aw[n], bw[n], 1e-9)
			}
			if n := testing.AllocsPerRun(10, func() { s.Approach(c, 5, 0.01, 0.95, &sol) }); n != 0 {
				t.Errorf("%g allocations", n)
			}
		})
	}
}

// Where no step serves, the answer is Regulated's.
func TestApproachLeavesTheModeOrTheRange(t *testing.T) {
	var s Solver
	var sol, want Solution
	s.Regulated(buoy(1), 5, 0.01, 0.95, &sol)
	for _, k := range []struct {
		c  *Circuit
		v  float64
		hi float64
	}{{light(buoy(1)), 5, 0.95}, {buoy(1), 20, 0.5}, {buoy(1), 5, 0.1}} {
		got := sol
		if change := s.Approach(k.c, k.v, 0.01, k.hi, &got); change != 0 {
			t.Error("change", change)
		}
		s.Regulated(k.c, k.v, 0.01, k.hi, &want)
		if got != want {
			t.Errorf("got %+v\nwant %+v", got, want)
		}
	}
	got := Solution{}
	got.Leg.Mode, got.Leg.HighSide.Mean = Continuous, math.NaN()
	s.Approach(buoy(1), 5, 0.01, 0.95, &got)
	if got.Status != Solved {
		t.Error(got.Status)
	}
}
