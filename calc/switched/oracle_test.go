package switched

import (
	"fmt"
	"math"
	"sort"
	"testing"

	"railproof/calc/internal/calctest"
)

// oracle integrates one period of the circuit by classical Runge-Kutta in small
// steps, from a given state. It shares no formula with the solver: node voltage
// from Kirchhoff's law, rectifiers turned off where their current reaches zero.
type oracle struct {
	c     *Circuit
	duty  float64
	on    [MaxPhases]bool
	rest  [MaxPhases]bool
	legs  [MaxPhases]LegSolution
	out   extent
	state []float64 // currents, bank voltages, then running integrals
}

func (o *oracle) node(x []float64) float64 {
	c := o.c
	sum, g := -c.Current, c.Conductance
	for p := range c.Phases {
		sum += x[p]
	}
	for k := range c.Banks {
		sum += x[c.Phases+k] / c.Bank[k].ESR
		g += 1 / c.Bank[k].ESR
	}
	return sum / g
}

// integrals: per phase on, on², off, off²; then input², v_o, v_o², bank².
func (o *oracle) rate(x, y []float64) {
	c := o.c
	vo := o.node(x)
	n := c.Phases + c.Banks
	input := 0.0
	for p := range c.Phases {
		leg := c.leg(p)
		i := x[p]
		q := y[n+4*p : n+4*p+4]
		q[0], q[1], q[2], q[3] = 0, 0, 0, 0
		switch {
		case o.on[p]:
			y[p] = (c.Vin - i*(leg.HighSide+leg.Winding) - vo) / leg.L
			q[0], q[1] = i, i*i
			input += i
		case o.rest[p]:
			y[p] = 0
		default:
			y[p] = (-leg.Rectifier.Threshold - i*(leg.Rectifier.Slope+leg.Winding) - vo) / leg.L
			q[2], q[3] = i, i*i
		}
	}
	at := n + 4*c.Phases
	y[at], y[at+1], y[at+2] = input*input, vo, vo*vo
	for k := range c.Banks {
		j := (vo - x[c.Phases+k]) / c.Bank[k].ESR
		y[c.Phases+k] = j / c.Bank[k].C
		y[at+3+k] = j * j
	}
}

func (o *oracle) step(h float64) {
	n := len(o.state)
	k1, k2, k3, k4, x := make([]float64, n), make([]float64, n), make([]float64, n), make([]float64, n), make([]float64, n)
	at := func(k []float64, q float64) []float64 {
		for i := range x {
			x[i] = o.state[i] + q*k[i]
		}
		return x
	}
	o.rate(o.state, k1)
	o.rate(at(k1, h/2), k2)
	o.rate(at(k2, h/2), k3)
	o.rate(at(k3, h), k4)
	for i := range o.state {
		o.state[i] += h / 6 * (k1[i] + 2*k2[i] + 2*k3[i] + k4[i])
	}
}

// watch keeps extremes.
func (o *oracle) watch() {
	o.out.add(o.node(o.state))
	for p := range o.c.Phases {
		o.legs[p].Peak = math.Max(o.legs[p].Peak, o.state[p])
		o.legs[p].Valley = math.Min(o.legs[p].Valley, o.state[p])
	}
}

// run integrates one period in about the given number of steps.
func (o *oracle) run(start []float64, steps int) {
	c := o.c
	o.state = append(append([]float64{}, start...), make([]float64, 4*c.Phases+3+c.Banks)...)
	o.out = extent{math.Inf(1), math.Inf(-1)}
	edges := append(make([]float64, 0, 2+2*MaxPhases), 0, 1)
	for p := range c.Phases {
		at := float64(p) / float64(c.Phases)
		edges = append(edges, at, math.Mod(at+o.duty, 1))
		o.legs[p] = LegSolution{Peak: math.Inf(-1), Valley: math.Inf(1)}
		angle := math.Mod(1-at, 1)
		o.on[p] = angle < o.duty
		o.rest[p] = !o.on[p] && c.leg(p).Rectifier.Blocks && start[p] == 0
	}
	sort.Float64s(edges)
	o.watch()
	for e := 1; e < len(edges); e++ {
		length := (edges[e] - edges[e-1]) * c.Period
		if length < 1e-13*c.Period {
			continue
		}
		middle := (edges[e] + edges[e-1]) / 2
		for p := range c.Phases {
			was := o.on[p]
			o.on[p] = math.Mod(middle-float64(p)/float64(c.Phases)+1, 1) < o.duty
			if o.on[p] && !was {
				o.rest[p] = false
			}
		}
		m := 1 + int(float64(steps)*length/c.Period)
		for range m {
			o.advance(length/float64(m), 0)
			o.watch()
		}
	}
}

// advance takes one step, split where a blocking rectifier runs out of current.
func (o *oracle) advance(h float64, depth int) {
	before := append([]float64{}, o.state...)
	o.step(h)
	for p := range o.c.Phases {
		if o.on[p] || o.rest[p] || !o.c.leg(p).Rectifier.Blocks || o.state[p] >= 0 || depth > MaxPhases {
			continue
		}
		a, b := 0.0, h
		for range 200 {
			m := (a + b) / 2
			copy(o.state, before)
			o.step(m)
			if o.state[p] > 0 {
				a = m
			} else {
				b = m
			}
		}
		copy(o.state, before)
		o.advance(a, depth+1)
		o.state[p], o.rest[p] = 0, true
		o.advance(h-a, depth+1)
		return
	}
}

// checkOracle starts the oracle at the periodic state and compares everything.
func checkOracle(t *testing.T, c *Circuit, sol *Solution, steps int, tol float64) {
	t.Helper()
	var s Solver
	w, ok := s.Waveform(c, sol, 50)
	if !ok {
		t.Fatal("no waveform")
	}
	start := make([]float64, 0, c.Phases+c.Banks)
	for p := range c.Phases {
		start = append(start, w.Inductor[p][0])
	}
	for k := range c.Banks {
		start = append(start, w.BankVoltage[k][0])
	}
	o := oracle{c: c, duty: sol.Duty}
	o.run(start, steps)
	peak := 0.0
	for p := range c.Phases {
		peak = math.Max(peak, math.Abs(o.legs[p].Peak))
	}
	current := func(what string, got, want float64) {
		t.Helper()
		calctest.Within(t, what, got, want, tol*math.Max(peak, 1e-3))
	}
	for i, x := range start {
		scale := peak
		if i >= c.Phases {
			scale = sol.OutputMean
		}
		calctest.Within(t, fmt.Sprintf("closure of state %d", i), o.state[i], x, tol*scale)
	}
	n := c.Phases + c.Banks
	for p := range c.Phases {
		ls := &sol.Leg
		if c.Legs != nil {
			ls = &sol.Legs[p]
		}
		q := o.state[n+4*p:]
		current("high side mean", ls.HighSide.Mean, q[0]/c.Period)
		current("high side rms", ls.HighSide.RMS, math.Sqrt(q[1]/c.Period))
		current("rectifier mean", ls.Rectifier.Mean, q[2]/c.Period)
		current("rectifier rms", ls.Rectifier.RMS, math.Sqrt(q[3]/c.Period))
		current("inductor mean", ls.Inductor.Mean, (q[0]+q[2])/c.Period)
		current("inductor rms", ls.Inductor.RMS, math.Sqrt((q[1]+q[3])/c.Period))
		current("peak", ls.Peak, o.legs[p].Peak)
		current("valley", ls.Valley, o.legs[p].Valley)
	}
	q := o.state[n+4*c.Phases:]
	current("input rms", sol.InputRMS, math.Sqrt(q[0]/c.Period))
	calctest.Close(t, "output mean", sol.OutputMean, q[1]/c.Period, tol)
	calctest.Close(t, "output power", sol.OutputPower, (c.Current*q[1]+c.Conductance*q[2])/c.Period, tol)
	for k := range c.Banks {
		current("bank rms", sol.BankRMS[k], math.Sqrt(q[3+k]/c.Period))
	}
	ripple := o.out.most - o.out.least
	calctest.Within(t, "output min", sol.OutputMin, o.out.least, 1e-4*ripple+tol*sol.OutputMean)
	calctest.Within(t, "output max", sol.OutputMax, o.out.most, 1e-4*ripple+tol*sol.OutputMean)
	if !(sol.EnergyBalance <= 1e-9) {
		t.Errorf("energy balance %g", sol.EnergyBalance)
	}
}

func TestAgainstIntegration(t *testing.T) {
	phases := func(c *Circuit, n int) *Circuit { c.Phases = n; c.Current *= float64(n); return c }
	unequal := func(c *Circuit, n int) *Circuit {
		phases(c, n)
		var legs [MaxPhases]Leg
		for p := range legs {
			legs[p] = c.Leg
			legs[p].L *= 1 + 0.1*float64(p)
			legs[p].HighSide *= 1 + 0.2*float64(p)
		}
		c.Legs = &legs
		return c
	}
	with := func(c *Circuit, change func(*Circuit)) *Circuit { change(c); return c }
	emulated := func(c *Circuit) *Circuit {
		c.Leg.Rectifier = Rectifier{Slope: 0.01, Blocks: true}
		return c
	}
	for _, k := range []struct {
		name string
		c    *Circuit
		duty float64 // 0: regulated to 5 V
	}{
		{"ccm/one bank", buoy(1), 0.3},
		{"ccm/four banks", buoy(4), 0},
		{"ccm/five banks", buoy(5), 0.4},
		{"ccm/six banks", buoy(6), 0.2},
		{"ccm/no load, synchronous", with(buoy(2), func(c *Circuit) { c.Current = 0 }), 0.25},
		{"ccm/no load, one bank", with(buoy(1), func(c *Circuit) { c.Current = 0 }), 0},
		{"ccm/reverse current forced", with(buoy(3), func(c *Circuit) { c.Current = 0; c.Conductance = 0.01 }), 0},
		{"ccm/resistor", with(buoy(1), func(c *Circuit) { c.Current = 0; c.Conductance = 1.2 }), 0.5},
		{"ccm/slow switching", with(buoy(1), func(c *Circuit) { c.Period = 3e-5; c.Conductance = 0.1 }), 0.3},
		{"ccm/slow switching, two banks", with(buoy(2), func(c *Circuit) { c.Period = 1e-4 }), 0.3},
		{"dcm/one bank", light(buoy(1)), 0.1},
		{"dcm/one bank regulated", light(buoy(1)), 0},
		{"dcm/resistor", with(light(buoy(1)), func(c *Circuit) { c.Conductance = 0.02 }), 0},
		{"dcm/emulated", emulated(light(buoy(1))), 0},
		{"dcm/emulated, three banks", emulated(light(buoy(3))), 0},
		{"dcm/decaying output", with(light(buoy(1)), func(c *Circuit) { c.Current = 0; c.Conductance = 0.02; c.Bank[0].C = 3e-7; c.Bank[0].ESR = 0.02 }), 0.15},
		{"dcm/six banks", light(buoy(6)), 0.15},
		{"boundary/just continuous", with(light(buoy(1)), func(c *Circuit) { c.Current = 0.66 }), 0},
		{"boundary/just resting", with(light(buoy(1)), func(c *Circuit) { c.Current = 0.60 }), 0},
		{"phases/two", phases(buoy(2), 2), 0.3},
		{"phases/two above half", phases(buoy(1), 2), 0.7},
		{"phases/three", phases(buoy(1), 3), 0.5},
		{"phases/four at a null", phases(buoy(2), 4), 0.25},
		{"phases/five", phases(buoy(1), 5), 0},
		{"phases/six", phases(buoy(3), 6), 0.55},
		{"phases/two resting", phases(light(buoy(1)), 2), 0.1},
		{"phases/three resting", phases(light(buoy(2)), 3), 0},
		{"phases/four resting", phases(emulated(light(buoy(1))), 4), 0.15},
		{"unequal/two", unequal(buoy(1), 2), 0.3},
		{"unequal/three", unequal(buoy(2), 3), 0},
		{"unequal/six", unequal(buoy(1), 6), 0.4},
		{"unequal/two resting", unequal(light(buoy(1)), 2), 0.1},
		{"unequal/three resting", unequal(light(buoy(2)), 3), 0},
	} {
		t.Run(k.name, func(t *testing.T) {
			var s Solver
			var sol Solution
			calctest.Poison(&sol)
			if k.duty > 0 {
				s.FixedDuty(k.c, k.duty, &sol)
			} else {
				s.Regulated(k.c, 5, 0, 1, &sol)
				calctest.Close(t, "regulated", sol.OutputMean, 5, 1e-11)
			}
			if sol.Status != Solved {
				t.Fatal("status", sol.Status)
			}
			checkOracle(t, k.c, &sol, 6000, 1e-8)
			t.Logf("mode %d duty %.4f output %.4f ripple %.4g balance %.2g rounds %d", sol.Leg.Mode, sol.Duty, sol.OutputMean, sol.OutputMax-sol.OutputMin, sol.EnergyBalance, sol.Iterations)
		})
	}
}
