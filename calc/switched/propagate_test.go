package switched

import (
	"math"
	"testing"

	"railproof/calc/internal/calctest"
)

// runPeriod moves an absolute state through the stretches of a linearised
// solution with the propagator; cut moves the turn-off edge by that much time.
func runPeriod(c *Circuit, lin *Linearised, x State, cut float64) State {
	var p Propagator
	p.Reset(c)
	for k := range lin.Count {
		st := &lin.Stretches[k]
		for j := range lin.Phases {
			if st.Positions[j] == Resting {
				x[j] = 0
			}
		}
		p.Place(c, &st.Positions)
		dt := st.Duration
		if k == 0 {
			dt += cut
		}
		if k == 1 {
			dt -= cut
		}
		if lin.Count == 3 && k == 1 { // up to where the current is zero
			w := State{1}
			at, _ := p.Crossing(&x, &w, 0, 0, 2*dt)
			lin.Stretches[2].Duration += dt - at
			continue
		}
		p.Advance(&x, dt)
	}
	return x
}

// The map against differences of the propagated state, in both modes.
func TestLineariseAgainstDifferences(t *testing.T) {
	for name, c := range map[string]*Circuit{"ccm": buoy(2), "dcm": light(buoy(3))} {
		t.Run(name, func(t *testing.T) {
			var s Solver
			var lin Linearised
			if st := s.Linearise(c, 0.2, &lin); st != Solved {
				t.Fatal(st)
			}
			keep := lin
			x0 := lin.Stretches[0].Start
			end := runPeriod(c, &lin, x0, 0)
			for i := range lin.States {
				calctest.Within(t, "closure", end[i], x0[i], 1e-10)
			}
			for j := range lin.States {
				if name == "dcm" && j == 0 {
					continue // a current that starts from rest is zero
				}
				up, down := x0, x0
				const h = 1e-5
				up[j] += h
				down[j] -= h
				lin = keep
				a := runPeriod(c, &lin, up, 0)
				lin = keep
				b := runPeriod(c, &lin, down, 0)
				for i := range lin.States {
					want := (a[i] - b[i]) / (2 * h)
					if name == "dcm" && i == 0 {
						want = 0
					}
					calctest.Within(t, "map", lin.Map[i][j], want, 1e-6)
				}
			}
			const h = 1e-12
			lin = keep
			a := runPeriod(c, &lin, x0, h)
			lin = keep
			b := runPeriod(c, &lin, x0, -h)
			for i := range lin.States {
				want := (a[i] - b[i]) / (2 * h) * c.Period
				if name == "dcm" && i == 0 {
					want = 0
				}
				calctest.Within(t, "to duty", lin.ToDuty[i], want, 1e-3*math.Max(1, math.Abs(want)))
			}
			input := func(dv, di float64) State {
				e := *c
				e.Vin += dv
				e.Current += di
				lin = keep
				return runPeriod(&e, &lin, x0, 0)
			}
			const q = 1e-4
			a, b = input(q, 0), input(-q, 0)
			g, h2 := input(0, q), input(0, -q)
			for i := range lin.States {
				if name == "dcm" && i == 0 {
					continue
				}
				calctest.Within(t, "to input", lin.ToInput[i], (a[i]-b[i])/(2*q), 1e-7)
				calctest.Within(t, "to current", lin.ToCurrent[i], (g[i]-h2[i])/(2*q), 1e-7)
			}
		})
	}
}

// One long step equals many short ones, stiff or not.
func TestAdvanceSplits(t *testing.T) {
	c := buoy(6)
	var p Propagator
	p.Reset(c)
	p.Place(c, &Positions{High})
	x := State{5, 4.9, 5, 5.1, 5, 5, 5}
	y := x
	p.Advance(&x, 1e-6)
	for range 4096 {
		p.Advance(&y, 1e-6/4096)
	}
	for i := range p.States() {
		calctest.Close(t, "state", x[i], y[i], 1e-12)
	}
}
