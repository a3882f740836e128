package switched

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"railproof/calc/internal/calctest"
)

// circuits draws circuits of every kind from a fixed seed: parts over decades,
// any load, any number of banks and phases.
func circuits(seed uint64) func() (*Circuit, float64) {
	r := rand.New(rand.NewPCG(seed, 1))
	span := func(lo, hi float64) float64 { return lo * math.Pow(hi/lo, r.Float64()) }
	rectifier := func() Rectifier {
		switch r.IntN(3) {
		case 0:
			return Rectifier{Slope: span(1e-5, 0.3)}
		case 1:
			return Rectifier{Slope: span(1e-5, 0.3), Blocks: true}
		}
		return Rectifier{Threshold: span(0.1, 1), Slope: span(1e-5, 0.3), Blocks: true}
	}
	return func() (*Circuit, float64) {
		c := &Circuit{Vin: span(2, 200), Period: span(2e-7, 1e-4), Phases: 1, Banks: 1 + r.IntN(MaxBanks)}
		if r.IntN(3) == 0 {
			c.Phases = 1 + r.IntN(MaxPhases)
		}
		if r.IntN(2) == 0 {
			c.Banks = 1
		}
		load := span(1e-3, 50)
		l := c.Vin * c.Period / load * span(0.05, 30)
		leg := func() Leg {
			return Leg{L: l * span(0.7, 1.4), Winding: span(1e-6, 0.1) * c.Vin / load, HighSide: span(1e-6, 0.1) * c.Vin / load, Rectifier: rectifier()}
		}
		c.Leg = leg()
		if c.Phases > 1 && r.IntN(2) == 0 {
			c.Legs = new([MaxPhases]Leg)
			for p := range c.Legs {
				c.Legs[p] = leg()
				c.Legs[p].Rectifier = c.Leg.Rectifier
			}
		}
		for k := range c.Banks {
			c.Bank[k] = Bank{C: load * c.Period / c.Vin * span(0.5, 1e4), ESR: c.Vin / load * span(1e-6, 0.3)}
		}
		switch r.IntN(4) {
		case 0:
			c.Current = load
		case 1:
			c.Conductance = load / c.Vin * 2
		case 2:
			c.Current, c.Conductance = load/2, load/c.Vin
		}
		return c, 0.02 + 0.96*r.Float64()
	}
}

// many is n, or a tenth of it in a short run.
func many(n int) int {
	if testing.Short() {
		return n / 10
	}
	return n
}

// Whatever finite circuit comes, the answer is a declared status, and a solution
// balances to 1e-9 and closes.
func TestAnyCircuit(t *testing.T) {
	draw := circuits(20260)
	var s Solver
	var sol Solution
	counts := map[Status]int{}
	worst := 0.0
	drawn := many(6000)
	for i := range drawn {
		c, d := draw()
		calctest.Poison(&sol)
		if i%2 == 0 {
			s.FixedDuty(c, d, &sol)
		} else {
			s.Regulated(c, c.Vin*d, 0.01, 0.99, &sol)
		}
		counts[sol.Status]++
		switch sol.Status {
		case Solved, DropOut, TooShortOnTime:
			if !(sol.EnergyBalance <= 1e-9 && sol.Residual <= 1e-9) {
				t.Errorf("circuit %d, status %d: energy balance %g, closure %g\n%+v duty %g", i, sol.Status, sol.EnergyBalance, sol.Residual, c, d)
			}
			worst = math.Max(worst, sol.EnergyBalance)
			if sol.Status == Solved && i%2 == 1 {
				calctest.Close(t, "regulated", sol.OutputMean, c.Vin*d, 1e-10)
			}
		case NoOperatingPoint:
		case NotConverged:
			t.Logf("circuit %d not converged: duty %.4f balance %.2g rounds %d N=%d n=%d legs %v blocks %v: %s", i, d, sol.EnergyBalance, sol.Iterations, c.Phases, c.Banks, c.Legs != nil, c.Leg.Rectifier.Blocks, about(c))
		default:
			t.Errorf("circuit %d: status %d", i, sol.Status)
		}
	}
	t.Log(counts, "worst balance", worst)
	if counts[Solved] < drawn*2/3 || counts[NotConverged] > 2 {
		t.Error(counts)
	}
}

// about tells the numbers that decide how a circuit behaves.
func about(c *Circuit) string {
	total, fastest := 0.0, 0.0
	for k := range c.Banks {
		total += c.Bank[k].C
		fastest = math.Max(fastest, c.Period/(c.Bank[k].C*c.Bank[k].ESR))
	}
	return fmt.Sprintf("wT %.3g, T/RC %.3g, RT/L %.3g, load %.3g A + %.3g S at %.3g V, Z %.3g ohm", c.Period/math.Sqrt(c.Leg.L*total), fastest,
		(c.Leg.Winding+c.Leg.HighSide)*c.Period/c.Leg.L, c.Current, c.Conductance, c.Vin, math.Sqrt(c.Leg.L/total))
}

// figures lists what has a unit: voltages, currents, powers.
func figures(sol *Solution, banks int) (volts, amps, watts []float64) {
	l := &sol.Leg
	volts = []float64{sol.OutputMean, sol.OutputMin, sol.OutputMax, sol.OutputMax - sol.OutputMin}
	amps = append(make([]float64, 0, 12+banks), l.Inductor.Mean, l.Inductor.RMS, l.HighSide.Mean, l.HighSide.RMS, l.Rectifier.Mean, l.Rectifier.RMS, l.Peak, l.Valley, l.TurnOn, l.TurnOff, sol.InputMean, sol.InputRMS)
	amps = append(amps, sol.BankRMS[:banks]...)
	watts = []float64{sol.InputPower, sol.OutputPower}
	return
}

// Dimensional analysis by test: what the unit of a figure says about three ways
// to scale the circuit.
func TestScaling(t *testing.T) {
	draw := circuits(7)
	const k = 3.7
	checked := 0
	for checked < 150 {
		c, d := draw()
		var s Solver
		var base Solution
		s.FixedDuty(c, d, &base)
		if base.Status != Solved {
			continue
		}
		checked++
		scaled := func(name string, change func(e *Circuit), v, i float64) {
			e := *c
			if c.Legs != nil {
				legs := *c.Legs
				e.Legs = &legs
			}
			change(&e)
			var sol Solution
			s.FixedDuty(&e, d, &sol)
			if sol.Status != Solved {
				t.Errorf("%s: status %d", name, sol.Status)
				return
			}
			av, ai, aw := figures(&base, c.Banks)
			bv, bi, bw := figures(&sol, c.Banks)
			near := func(what string, a, b []float64, q, scale, tol float64) {
				for n := range a {
					calctest.Within(t, fmt.Sprintf("%s: %s %d", name, what, n), b[n]/q, a[n], tol*scale)
				}
			}
			near("voltage", av, bv, v, base.OutputMax, 1e-11)
			near("current", ai, bi, i, math.Max(base.Leg.Peak, -base.Leg.Valley), 1e-10)
			near("power", aw, bw, v*i, c.Vin*base.Leg.Peak, 1e-10)
		}
		legs := func(e *Circuit, f func(*Leg)) {
			f(&e.Leg)
			if e.Legs != nil {
				for p := range e.Legs {
					f(&e.Legs[p])
				}
			}
		}
		scaled("impedance", func(e *Circuit) {
			legs(e, func(l *Leg) { l.L *= k; l.Winding *= k; l.HighSide *= k; l.Rectifier.Slope *= k })
			for b := range e.Bank {
				e.Bank[b].C /= k
				e.Bank[b].ESR *= k
			}
			e.Current /= k
			e.Conductance /= k
		}, 1, 1/k)
		scaled("time", func(e *Circuit) {
			legs(e, func(l *Leg) { l.L /= k })
			for b := range e.Bank {
				e.Bank[b].C /= k
			}
			e.Period /= k
		}, 1, 1)
		scaled("sources", func(e *Circuit) {
			legs(e, func(l *Leg) { l.Rectifier.Threshold *= k })
			e.Vin *= k
			e.Current *= k
		}, k, k)
	}
}

// The closed form for one bank against the general solver.
func TestClosedFormAgainstGeneral(t *testing.T) {
	draw := circuits(3)
	checked, resting := 0, 0
	drawn := many(5000)
	for range drawn {
		c, d := draw()
		c.Banks, c.Phases, c.Legs = 1, 1, nil
		var s Solver
		var a, b Solution
		if s.fast.set(c); !s.fast.fixed(c, d, &a) || a.Status != Solved {
			continue
		}
		s.fast.outputRange(&a)
		s.prepare(c)
		s.finish(c, s.settle(c, d), &b)
		if b.Status != Solved {
			t.Fatalf("general solver: %d for %+v duty %g", b.Status, c, d)
		}
		checked++
		if a.Leg.Mode == Discontinuous {
			resting++
		}
		av, ai, aw := figures(&a, 1)
		bv, bi, bw := figures(&b, 1)
		for n := range av {
			calctest.Within(t, fmt.Sprint("voltage ", n), av[n], bv[n], 1e-10*b.OutputMax)
		}
		for n := range ai {
			calctest.Within(t, fmt.Sprint("current ", n), ai[n], bi[n], 1e-9*math.Max(b.Leg.Peak, -b.Leg.Valley))
		}
		for n := range aw {
			calctest.Within(t, fmt.Sprint("power ", n), aw[n], bw[n], 1e-9*c.Vin*b.Leg.HighSide.RMS)
		}
		if a.Leg.Mode != b.Leg.Mode && math.Abs(b.Leg.Valley) > 1e-9*b.Leg.Peak {
			t.Error("mode", a.Leg.Mode, b.Leg.Mode)
		}
		if t.Failed() {
			t.Fatalf("%+v duty %g", c, d)
		}
	}
	if checked < drawn*2/5 || resting < drawn*3/100 {
		t.Errorf("only %d compared, %d of them resting", checked, resting)
	}
}

func TestTwoEqualBanksActAsOne(t *testing.T) {
	for _, c := range []*Circuit{buoy(1), light(buoy(1)), func() *Circuit { c := buoy(1); c.Conductance = 0.4; return c }()} {
		one := solveFixed(t, c, 0.15)
		e := *c
		e.Banks = 2
		e.Bank[0] = Bank{C: c.Bank[0].C / 2, ESR: c.Bank[0].ESR * 2}
		e.Bank[1] = e.Bank[0]
		two := solveFixed(t, &e, 0.15)
		calctest.Close(t, "output", two.OutputMean, one.OutputMean, 1e-13)
		calctest.Close(t, "ripple", two.OutputMax-two.OutputMin, one.OutputMax-one.OutputMin, 1e-9)
		calctest.Close(t, "bank", 2*two.BankRMS[0], one.BankRMS[0], 1e-11)
		calctest.Close(t, "bank", two.BankRMS[1], two.BankRMS[0], 1e-12)
		calctest.Close(t, "peak", two.Leg.Peak, one.Leg.Peak, 1e-12)
	}
}

// Equal phases solved over one N-th of the period against the same legs solved
// over the whole of it.
func TestEqualPhasesAgainstWholePeriod(t *testing.T) {
	draw := circuits(11)
	checked := 0
	drawn := many(1500)
	for range drawn {
		c, d := draw()
		if c.Phases < 2 {
			continue
		}
		c.Legs = nil
		var s Solver
		var a, b Solution
		s.FixedDuty(c, d, &a)
		e := *c
		e.Legs = new([MaxPhases]Leg)
		for p := range e.Legs {
			e.Legs[p] = c.Leg
		}
		s.FixedDuty(&e, d, &b)
		if a.Status != Solved || b.Status != Solved {
			continue
		}
		checked++
		av, ai, _ := figures(&a, c.Banks)
		bv, bi, _ := figures(&b, c.Banks)
		for n := range av {
			calctest.Within(t, fmt.Sprint("voltage ", n), bv[n], av[n], 1e-9*a.OutputMax)
		}
		for n := range ai {
			calctest.Within(t, fmt.Sprint("current ", n), bi[n], ai[n], 1e-8*math.Max(a.Leg.Peak, -a.Leg.Valley))
		}
		if t.Failed() {
			t.Fatalf("%+v duty %g", c, d)
		}
	}
	if checked < drawn/10 {
		t.Errorf("only %d compared", checked)
	}
}

// Every figure passes the conduction boundary without a step.
func TestContinuousAtTheBoundary(t *testing.T) {
	for banks := 1; banks <= 3; banks++ {
		c := light(buoy(banks))
		var s Solver
		var sol Solution
		lo, hi := 0.1, 3.0
		for range 60 {
			c.Current = (lo + hi) / 2
			s.Regulated(c, 5, 0, 1, &sol)
			if sol.Leg.Mode == Discontinuous {
				lo = c.Current
			} else {
				hi = c.Current
			}
		}
		var a, b Solution
		c.Current = lo * (1 - 1e-9)
		s.Regulated(c, 5, 0, 1, &a)
		c.Current = hi * (1 + 1e-9)
		s.Regulated(c, 5, 0, 1, &b)
		if a.Leg.Mode != Discontinuous || b.Leg.Mode != Continuous {
			t.Fatal("boundary not bracketed")
		}
		calctest.Close(t, "duty", a.Duty, b.Duty, 1e-6)
		av, ai, aw := figures(&a, banks)
		bv, bi, bw := figures(&b, banks)
		for n := range av {
			calctest.Within(t, "voltage", av[n], bv[n], 1e-7)
		}
		for n := range ai {
			calctest.Within(t, "current", ai[n], bi[n], 1e-6)
		}
		for n := range aw {
			calctest.Within(t, "power", aw[n], bw[n], 1e-6)
		}
	}
}

func TestStatuses(t *testing.T) {
	var s Solver
	var sol Solution
	for _, k := range []struct {
		name string
		c    *Circuit
		vout float64
		lo   float64
		hi   float64
		want Status
	}{
		{"regulated", buoy(1), 5, 0.01, 0.95, Solved},
		{"asks for more than the input", buoy(1), 30, 0.01, 0.95, DropOut},
		{"asks for more than the input, two banks", buoy(2), 30, 0.01, 0.95, DropOut},
		{"greatest duty ratio reached", buoy(1), 12, 0.01, 0.4, DropOut},
		{"least on-time reached", buoy(1), 1, 0.1, 0.95, TooShortOnTime},
		{"light load on a diode", light(buoy(1)), 5, 0.1, 0.95, TooShortOnTime},
		{"light load on a diode, three banks", light(buoy(3)), 5, 0.1, 0.95, TooShortOnTime},
		{"load too heavy", func() *Circuit { c := buoy(1); c.Current = 1e4; return c }(), 5, 0.01, 0.95, NoOperatingPoint},
		{"load too heavy, three banks", func() *Circuit { c := buoy(3); c.Current = 1e4; return c }(), 5, 0.01, 0.95, NoOperatingPoint},
		{"no load on a diode", func() *Circuit { c := light(buoy(1)); c.Current = 0; return c }(), 5, 0.01, 0.95, TooShortOnTime},
		{"no load on a diode, two banks", func() *Circuit { c := light(buoy(2)); c.Current = 0; return c }(), 5, 0.01, 0.95, TooShortOnTime},
		{"not a number", func() *Circuit { c := buoy(1); c.Vin = math.NaN(); return c }(), 5, 0.01, 0.95, NotConverged},
		{"not a number, two banks", func() *Circuit { c := buoy(2); c.Leg.L = math.NaN(); return c }(), 5, 0.01, 0.95, NotConverged},
	} {
		t.Run(k.name, func(t *testing.T) {
			calctest.Poison(&sol)
			s.Regulated(k.c, k.vout, k.lo, k.hi, &sol)
			if sol.Status != k.want {
				t.Errorf("status %d, want %d; duty %g output %g", sol.Status, k.want, sol.Duty, sol.OutputMean)
			}
			switch sol.Status {
			case DropOut:
				calctest.Close(t, "duty", sol.Duty, k.hi, 0)
			case TooShortOnTime:
				calctest.Close(t, "duty", sol.Duty, k.lo, 0)
			}
		})
	}
}

// The high side never on, and always on: direct current, or none at all.
func TestEndsOfTheDutyRatio(t *testing.T) {
	slow := buoy(1)
	slow.Period = 1e-3
	for name, c := range map[string]*Circuit{"one bank": buoy(1), "two banks": buoy(2), "general solver": slow, "three phases": func() *Circuit { c := buoy(1); c.Phases = 3; return c }()} {
		t.Run(name, func(t *testing.T) {
			var s Solver
			var sol Solution
			s.FixedDuty(c, 1, &sol)
			if sol.Status != Solved {
				t.Fatal(sol.Status)
			}
			i := c.Current / float64(c.Phases)
			calctest.Close(t, "output", sol.OutputMean, 24-i*(7e-3+9e-3), 1e-13)
			calctest.Within(t, "ripple", sol.OutputMax-sol.OutputMin, 0, 1e-12)
			calctest.Close(t, "high side", sol.Leg.HighSide.RMS, i, 1e-13)
			calctest.Within(t, "rectifier", sol.Leg.Rectifier.RMS, 0, 1e-13)
			calctest.Within(t, "balance", sol.EnergyBalance, 0, 1e-13)
			calctest.Poison(&sol)
			s.FixedDuty(c, 0, &sol)
			if sol.Status != NoOperatingPoint {
				t.Error(sol.Status)
			}
			e := *c
			e.Current = 0
			calctest.Poison(&sol)
			s.FixedDuty(&e, 0, &sol)
			if sol.Status != NoOperatingPoint {
				t.Error(sol.Status)
			}
			for _, x := range []float64{sol.OutputMean, sol.OutputMin, sol.OutputMax, sol.Leg.Inductor.RMS, sol.BankRMS[0], sol.EnergyBalance, sol.Residual} {
				calctest.Within(t, "nothing flows", x, 0, 1e-12)
			}
		})
	}
}

// A workspace full of NaN, or one that has just solved something else, gives
// the same bits as a fresh one, and nothing is allocated.
func TestWorkspaceHoldsNothing(t *testing.T) {
	var used Solver
	for _, c := range []*Circuit{buoy(1), light(buoy(1)), buoy(3), light(buoy(3)), func() *Circuit { c := buoy(2); c.Phases = 3; return c }()} {
		var fresh Solver
		var a, b Solution
		fresh.Regulated(c, 5, 0.01, 0.95, &a)
		used.Regulated(c, 5, 0.01, 0.95, &b)
		used.Regulated(c, 5, 0.01, 0.95, &b)
		if a != b {
			t.Errorf("differs:\n%+v\n%+v", a, b)
		}
		if n := testing.AllocsPerRun(20, func() { used.Regulated(c, 5, 0.01, 0.95, &b); used.FixedDuty(c, 0.2, &b) }); n != 0 {
			t.Errorf("%g allocations", n)
		}
	}
}
