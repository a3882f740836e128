package losses

import (
	"math"
	"testing"

	"pgregory.net/rapid"

	"railproof/calc/internal/calctest"
	"railproof/calc/magnetics"
	"railproof/calc/numeric"
	"railproof/calc/parts"
	"railproof/calc/stage"
	"railproof/calc/switched"
	"railproof/calc/thermal"
)

// buoy is the 24 V to 5 V, 6 A synchronous stage of the examples.
func buoy() *stage.Stage {
	s := stage.NewStage(stage.Synchronous, 1, 1, 0, false, false, false, true)
	s.SwitchingFrequency = 500e3
	fet := parts.MOSFET{
		OnResistance: 9e-3, OnResistanceTemp: numeric.Table{X: []float64{25, 125}, Y: []float64{1, 1.45}},
		GateCharge: 12e-9, GateSwitchCharge: 3.2e-9, GateSwitchChargeAt: 20, Plateau: 2.7, InternalGate: 1.2,
		OutputCharge: 14e-9, OutputChargeAt: 20, RecoveryCharge: 18e-9, BodyDiode: 0.85,
	}
	s.HighSide, s.LowSide = fet, fet
	s.LowSide.BodyDiode = 0.8
	s.Inductor = parts.Inductor{
		Inductance: 6.8e-6, InductanceAtCurrent: numeric.Table{X: []float64{0, 8, 14}, Y: []float64{1, 0.95, 0.7}},
		DCResistance: 7e-3, ACResistanceRatio: 3,
		Core: parts.Core{
			Present: true, K: 1.9, Alpha: 1.4, Beta: 2.4, Turns: 9, Area: 2.1e-5, Volume: 8e-7, BandLow: 0.7, BandHigh: 1.3,
			Temp: numeric.Table{X: []float64{25, 90}, Y: []float64{1.3, 1}},
		},
	}
	s.OutputCapacitors[0] = parts.Capacitor{Capacitance: 22e-6, Count: 4, ESR: 3e-3, ESRTemp: numeric.Table{X: []float64{25, 105}, Y: []float64{1, 0.8}}}
	s.InputCapacitors[0] = parts.Capacitor{Capacitance: 10e-6, Count: 2, ESR: 4e-3}
	s.Controller = parts.Controller{Drive: 5, GateOn: 2.5, GateOff: 1.5, DeadTime: 20e-9, MaxDutyRatio: 0.98, QuiescentCurrent: 2e-3, AuxiliaryPower: 0.01}
	s.Board = stage.Board{InputPath: 1e-3, OutputPath: 1e-3, SwitchNodePath: 5e-4}
	return s
}

// mast is a diode-rectified stage.
func mast() *stage.Stage {
	s := buoy()
	s.Rectifier = stage.DiodeRectified
	s.Diode = parts.Diode{
		Threshold: 0.42, Slope: 0.02, ThresholdTemp: -1.2e-3, JunctionCharge: 9e-9, JunctionAt: 20, RecoveryCharge: 5e-9,
		Leakage: numeric.Table{X: []float64{25, 125}, Y: []float64{2e-5, 8e-3}},
	}
	return s
}

// straight is the solution of a stage with straight current ramps, of duty d.
func straight(d, load, ripple float64) *switched.Solution {
	branch := func(share float64) switched.Branch {
		return switched.Branch{Mean: share * load, RMS: math.Sqrt(share * (load*load + ripple*ripple/12))}
	}
	leg := switched.LegSolution{
		Mode: switched.Continuous, Conduct: 1 - d, Inductor: branch(1), HighSide: branch(d), Rectifier: branch(1 - d),
		Peak: load + ripple/2, Valley: load - ripple/2, TurnOn: load - ripple/2, TurnOff: load + ripple/2,
	}
	return &switched.Solution{Status: switched.Solved, Duty: d, OutputMean: 5, Leg: leg, BankRMS: [switched.MaxBanks]float64{ripple / math.Sqrt(12)}}
}

// interrupted is a solution in discontinuous conduction.
func interrupted(d, d2, peak float64) *switched.Solution {
	ramp := func(share float64) switched.Branch {
		return switched.Branch{Mean: peak * share / 2, RMS: peak * math.Sqrt(share/3)}
	}
	leg := switched.LegSolution{
		Mode: switched.Discontinuous, Conduct: d2, Inductor: ramp(d + d2), HighSide: ramp(d), Rectifier: ramp(d2), Peak: peak, TurnOff: peak,
	}
	return &switched.Solution{Status: switched.Solved, Duty: d, OutputMean: 5, Leg: leg, BankRMS: [switched.MaxBanks]float64{peak / 4}}
}

func operation(sol *switched.Solution) *Operation {
	op := &Operation{Bridge: 24, Output: 5, BoardDegC: 45, AgeRatio: 0.2, Inductance: 6.6e-6, PathMean: 1.3, LoadRMS: 6, Solution: sol}
	op.InputBank[0] = 2.4
	return op
}

// frozen is a model at an operation, and a table of temperatures.
func frozen(s *stage.Stage, op *Operation) (*Model, *thermal.Vector) {
	m := &Model{}
	m.Prepare(s)
	m.Begin(op.AgeRatio)
	m.Charge(op.Bridge, op.Output)
	m.Freeze(op)
	degC := &thermal.Vector{}
	for i := range degC {
		degC[i] = 40 + 3*float64(i)
	}
	return m, degC
}

func fill(m *Model, degC *thermal.Vector) (*Sheet, float64) { return fillAt(m, operation(nil), degC) }

func fillAt(m *Model, op *Operation, degC *thermal.Vector) (*Sheet, float64) {
	s := &Sheet{}
	calctest.Poison(s)
	var power, slope thermal.Vector
	m.Warm(degC)
	m.Powers(&power, &slope)
	inside := m.Fill(op, s)
	return s, inside
}

func (s *Sheet) find(p Part, mech Mechanism) float64 {
	for i := range s.Items[:s.N] {
		if s.Items[i].Part == p && s.Items[i].Mechanism == mech {
			return s.Items[i].Power
		}
	}
	return 0
}

// TestItemsFromTheWaveform computes every item of the synchronous stage from the
// waveform itself, each once.
func TestItemsFromTheWaveform(t *testing.T) {
	const vin, f, td, d, load, ripple = 24.0, 500e3, 20e-9, 0.21, 6.0, 1.2
	s := buoy()
	m, degC := frozen(s, operation(straight(d, load, ripple)))
	sheet, inside := fill(m, degC)
	r := 9e-3 * (1 + 0.0045*(degC[HighSide]-25))
	rls := 9e-3 * (1 + 0.0045*(degC[LowSide]-25))
	dcr := 7e-3 * (1 + parts.CopperSlope*(degC[Inductor]-25))
	copper := 1 + parts.CopperSlope*20
	on, off := load-ripple/2, load+ripple/2
	period := 1 / f
	rising := func(x float64) float64 { return on + (off-on)*x/(d*period) }
	falling := func(x float64) float64 { return off + (on-off)*x/((1-d)*period) }
	channel := integral(func(x float64) float64 { return rls * square(falling(x)) }, 0, (1-d)*period) -
		td*rls*(on*on+off*off)
	qsw := 3.2e-9 * math.Sqrt(vin/20)
	_, own := s.HighSide.OutputAt(vin)
	q, e := s.LowSide.OutputAt(vin)
	swing := 6.6e-6 * ripple / (9 * 2.1e-5)
	core := magnetics.Steinmetz{K: 1.9, Alpha: 1.4, Beta: 2.4}.PiecewiseDensity([]float64{0, d * period, period}, []float64{-swing / 2, swing / 2, -swing / 2}) * 8e-7
	hotCore := 1.3 - 0.3*(degC[Inductor]-25)/65
	want := []struct {
		p    Part
		m    Mechanism
		want float64
	}{
		{HighSide, Conduction, f * integral(func(x float64) float64 { return r * square(rising(x)) }, 0, d*period)},
		{HighSide, Overlap, vin * f / 2 * qsw * (on*3.7/2.3 + off*2.7/2.7)},
		{HighSide, OutputCharge, f * (own + vin*q - e)},
		{HighSide, Recovery, vin * 18e-9 * f},
		{LowSide, Conduction, f * channel},
		{LowSide, DeadTime, f * td * 0.8 * 2 * load},
		{Inductor, WindingDC, dcr * load * load},
		{Inductor, WindingAC, 3 * dcr * ripple * ripple / 12},
		{Inductor, CoreHysteresis, hotCore * core},
		{Controller, GateDrive, 24e-9 * vin * f},
		{Controller, Quiescent, vin * 2e-3},
		{Controller, Auxiliary, 0.01},
		{Board, InputPath, 1e-3 * copper * 1.3 * 1.3},
		{Board, SwitchNodePath, 5e-4 * copper * (load*load + ripple*ripple/12)},
		{Board, OutputPath, 1e-3 * copper * 36},
		{OutputCapacitor, SeriesResistance, 3e-3 / 4 * (1 - 0.2*(degC[OutputCapacitor]-25)/80) * ripple * ripple / 12},
		{InputCapacitor, SeriesResistance, 2e-3 * 2.4 * 2.4},
	}
	total := 0.0
	for _, w := range want {
		calctest.Close(t, w.p.String()+" "+w.m.String(), sheet.find(w.p, w.m), w.want, 1e-9)
		total += w.want
	}
	if sheet.N != len(want) {
		t.Errorf("%d items, want %d: each stands once", sheet.N, len(want))
	}
	calctest.Close(t, "total", sheet.Total(), total, 1e-9)

	circuit := r*d*(load*load+ripple*ripple/12) + rls*(1-d)*(load*load+ripple*ripple/12) + dcr*(load*load+ripple*ripple/12) +
		want[13].want + want[14].want + want[15].want
	calctest.Close(t, "what the circuit or the load contains already", inside, circuit, 1e-12)
}

func TestReversedValley(t *testing.T) {
	const f, td = 500e3, 20e-9
	m, degC := frozen(buoy(), operation(straight(0.21, 0.2, 1.2))) // -0.4 A to 0.8 A
	sheet, _ := fill(m, degC)
	calctest.Close(t, "overlap at turn-off only", sheet.find(HighSide, Overlap), 24*f*0.8*m.point.toff/2, 1e-12)
	if p := sheet.find(HighSide, Recovery); p != 0 {
		t.Errorf("recovery %g", p)
	}
	calctest.Close(t, "no credit for output charge", sheet.find(HighSide, OutputCharge), m.point.outputCharge, 1e-15)
	calctest.Close(t, "high side's body diode carries the reversed edge", sheet.find(HighSide, DeadTime), f*td*0.85*0.4, 1e-9)
	calctest.Close(t, "low side's the other", sheet.find(LowSide, DeadTime), f*td*0.8*0.8, 1e-9)
}

func TestDiscontinuousConduction(t *testing.T) {
	for name, s := range map[string]*stage.Stage{"emulated": buoy(), "diode": mast()} {
		t.Run(name, func(t *testing.T) {
			if name == "emulated" {
				s.Rectifier = stage.SynchronousEmulated
			}
			m, degC := frozen(s, operation(interrupted(0.1, 0.3, 2)))
			sheet, _ := fill(m, degC)
			calctest.Close(t, "overlap at turn-off only", sheet.find(HighSide, Overlap), 24*500e3*2*m.point.toff/2, 1e-12)
			if p := sheet.find(HighSide, Recovery); p != 0 {
				t.Errorf("recovery %g", p)
			}
			swing := 6.6e-6 * 2 / (9 * 2.1e-5)
			s := magnetics.Steinmetz{K: 1.9, Alpha: 1.4, Beta: 2.4}
			want := s.PiecewiseDensity([]float64{0, 0.1 * 2e-6, 0.4 * 2e-6, 2e-6}, []float64{0, swing, 0, 0})
			m.warm.Core = 1 // as at its reference temperature
			density, got := m.Core()
			calctest.Close(t, "flux swing", got, swing, 1e-12)
			calctest.Close(t, "core of three pieces", density, want, 1e-12)
		})
	}
}

func TestDiodeStageItems(t *testing.T) {
	const d, load = 0.23, 2.0
	s := mast()
	m, degC := frozen(s, operation(straight(d, load, 0.5)))
	sheet, inside := fill(m, degC)
	vt := 0.42 - 1.2e-3*(degC[Diode]-25)
	conduction := (1 - d) * (vt*load + 0.02*(load*load+0.25/12))
	calctest.Close(t, "conduction", sheet.find(Diode, Conduction), conduction, 1e-12)
	ir, _ := s.Diode.LeakageAt(degC[Diode])
	calctest.Close(t, "leakage", sheet.find(Diode, Leakage), d*24*ir, 1e-12)
	q, e := s.Diode.JunctionChargeAt(24)
	calctest.Close(t, "junction charge, burnt in the high side", sheet.find(HighSide, JunctionCharge), 500e3*(24*q-e), 1e-12)
	_, own := s.HighSide.OutputAt(24)
	calctest.Close(t, "own output charge", sheet.find(HighSide, OutputCharge), 500e3*own, 1e-12)
	calctest.Close(t, "recovery", sheet.find(HighSide, Recovery), 24*5e-9*500e3, 1e-12)
	calctest.Close(t, "one gate", sheet.find(Controller, GateDrive), 12e-9*24*500e3, 1e-12)
	if sheet.Of(LowSide) != 0 || sheet.find(HighSide, DeadTime) != 0 {
		t.Error("a diode stage has no low side and no dead time")
	}
	if !(inside > conduction && inside < sheet.Total()) {
		t.Errorf("inside %g", inside)
	}
}

func TestDriveSupplies(t *testing.T) {
	for supply, want := range map[parts.DriveSupply]float64{parts.DriveFromInput: 24, parts.DriveFromExternal: 5.5, parts.DriveFromOutput: 5} {
		s := buoy()
		s.Controller.DriveSupply, s.Controller.Drive = supply, 5.5
		m, degC := frozen(s, operation(straight(0.21, 6, 1.2)))
		sheet, _ := fill(m, degC)
		calctest.Close(t, "gate drive", sheet.find(Controller, GateDrive), 24e-9*want*500e3, 1e-12)
	}
}

func TestRestingSwitchesLoseNothingBySwitching(t *testing.T) {
	sol := straight(0.5, 6, 0)
	sol.Duty = 1
	m, degC := frozen(buoy(), operation(sol))
	sheet, _ := fill(m, degC)
	for _, mech := range []Mechanism{Overlap, OutputCharge, Recovery, DeadTime, GateDrive, CoreHysteresis} {
		for i := range sheet.Items[:sheet.N] {
			if it := sheet.Items[i]; it.Mechanism == mech && it.Power != 0 {
				t.Errorf("%s %s: %g W at duty 1", it.Part, mech, it.Power)
			}
		}
	}
}

// TestUnequalPhases compares phases solved one by one with equal ones, and an
// override with its own resistance.
func TestUnequalPhases(t *testing.T) {
	s := buoy()
	s.PhaseCount = 2
	sol := straight(0.21, 6, 1.2)
	op := operation(sol)
	equal, degC := frozen(s, op)
	one, insideOne := fill(equal, degC)

	sol.Legs[0], sol.Legs[1] = sol.Leg, sol.Leg
	op.Inductances = &[switched.MaxPhases]float64{6.6e-6, 6.6e-6}
	listed, _ := frozen(s, op)
	two, insideTwo := fill(listed, degC)
	calctest.Close(t, "listed phases that are equal", two.Total(), one.Total(), 1e-12)
	calctest.Close(t, "inside", insideTwo, insideOne, 1e-12)

	none := parts.Unknown
	s.Phases = []stage.PhaseOverride{
		{Inductance: none, DCResistance: none, HighSideOn: none, LowSideOn: none},
		{Inductance: none, DCResistance: 14e-3, HighSideOn: 18e-3, LowSideOn: 9e-3},
	}
	sol.Legs[1] = straight(0.21, 4, 1.2).Leg
	uneven, _ := frozen(s, op)
	sheet, _ := fill(uneven, degC)
	multiplier := 1 + 0.0045*(degC[HighSide]-25)
	want := 0.21 * multiplier * (9e-3*(36+1.44/12) + 18e-3*(16+1.44/12))
	calctest.Close(t, "high sides together", 2*sheet.find(HighSide, Conduction), want, 1e-12)
	copper, _ := parts.CopperMultiplier(degC[Inductor])
	calctest.Close(t, "windings together", 2*sheet.find(Inductor, WindingDC), copper*(7e-3*36+14e-3*16), 1e-12)
}

// TestPowersAgreeWithItems holds the fast path to the table of items, and its
// slopes to a central difference.
func TestPowersAgreeWithItems(t *testing.T) {
	ops := map[string]*Operation{
		"ccm": operation(straight(0.21, 6, 1.2)), "reversed": operation(straight(0.21, 0.2, 1.2)), "dcm": operation(interrupted(0.1, 0.3, 2)),
	}
	for topology, s := range map[string]*stage.Stage{"synchronous": buoy(), "diode": mast()} {
		for mode, op := range ops {
			t.Run(topology+"/"+mode, func(t *testing.T) {
				m, degC := frozen(s, op)
				var power, slope thermal.Vector
				m.Warm(degC)
				m.Powers(&power, &slope)
				sheet, _ := fill(m, degC)
				for p := range PartCount {
					if p == Board {
						continue
					}
					calctest.Close(t, p.String(), sheet.Of(p), power[p], 1e-12)
					const h = 1e-3
					up, down := *degC, *degC
					up[p], down[p] = degC[p]+h, degC[p]-h
					var a, b, unused thermal.Vector
					m.Warm(&down)
					m.Powers(&a, &unused)
					m.Warm(&up)
					m.Powers(&b, &unused)
					calctest.Within(t, p.String()+" slope", slope[p], (b[p]-a[p])/(2*h), 1e-9)
				}
			})
		}
	}
}

// TestScaling is dimensional analysis: currents over k with resistances times k
// and charges over k divides every power by k; a period shortened by k with
// charges and dead times over k leaves them.
func TestScaling(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		k := rapid.Float64Range(0.1, 10).Draw(t, "k")
		load := rapid.Float64Range(-3, 20).Draw(t, "load")
		ripple := rapid.Float64Range(0.1, 10).Draw(t, "ripple")
		d := rapid.Float64Range(0.05, 0.95).Draw(t, "duty")
		base, degC := frozen(scaled(buoy(), 1, 1), operation(straight(d, load, ripple)))
		want, _ := fill(base, degC)

		op := operation(straight(d, load/k, ripple/k))
		op.PathMean, op.LoadRMS, op.InputBank[0] = op.PathMean/k, op.LoadRMS/k, op.InputBank[0]/k
		m, _ := frozen(scaled(buoy(), k, 1), op)
		got, _ := fillAt(m, op, degC)
		compare(t, "impedance", got, want, 1/k)

		m, _ = frozen(scaled(buoy(), 1, k), operation(straight(d, load, ripple)))
		got, _ = fill(m, degC)
		compare(t, "time", got, want, 1)
	})
}

// scaled multiplies impedances by r and frequency by f.
func scaled(s *stage.Stage, r, f float64) *stage.Stage {
	s.Inductor.Core.Present = false // an empirical fit
	s.SwitchingFrequency *= f
	s.Controller.DeadTime /= f
	s.Controller.QuiescentCurrent /= r
	s.Controller.AuxiliaryPower /= r
	s.Inductor.DCResistance *= r
	s.OutputCapacitors[0].ESR *= r
	s.InputCapacitors[0].ESR *= r
	s.Board.InputPath, s.Board.OutputPath, s.Board.SwitchNodePath = s.Board.InputPath*r, s.Board.OutputPath*r, s.Board.SwitchNodePath*r
	for _, m := range []*parts.MOSFET{&s.HighSide, &s.LowSide} {
		m.OnResistance *= r
		m.GateCharge /= r * f
		m.GateSwitchCharge /= r * f
		m.OutputCharge /= r * f
		m.RecoveryCharge /= r * f
		m.InternalGate *= r
	}
	s.Controller.GateOn, s.Controller.GateOff = s.Controller.GateOn*r, s.Controller.GateOff*r
	return s
}

func compare(t *rapid.T, what string, got, want *Sheet, factor float64) {
	for i := range want.Items[:want.N] {
		g, w := got.Items[i].Power, want.Items[i].Power*factor
		// The ripple's mean square is a difference: it errs by roundings of the whole.
		if math.Abs(g-w) > 1e-11*math.Abs(w)+1e-14*want.Total()*factor {
			t.Fatalf("%s scaling: %s %s %g, want %g", what, want.Items[i].Part, want.Items[i].Mechanism, g, w)
		}
	}
}

func TestLossesAreNeverNegative(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		s := buoy()
		if rapid.Bool().Draw(t, "diode") {
			s = mast()
		}
		s.Controller.DeadTime = rapid.Float64Range(0, 1e-6).Draw(t, "dead time")
		sol := straight(rapid.Float64Range(0.001, 0.999).Draw(t, "duty"), rapid.Float64Range(-20, 20).Draw(t, "load"), rapid.Float64Range(0, 20).Draw(t, "ripple"))
		if s.Rectifier == stage.DiodeRectified {
			sol = interrupted(0.3, rapid.Float64Range(0, 0.7).Draw(t, "fall"), rapid.Float64Range(0, 20).Draw(t, "peak"))
		}
		op := operation(sol)
		m, degC := frozen(s, op)
		for i := range degC {
			degC[i] = rapid.Float64Range(-273, 1000).Draw(t, "degC")
		}
		sheet := &Sheet{}
		var power, slope thermal.Vector
		m.Warm(degC)
		m.Powers(&power, &slope)
		m.Fill(op, sheet)
		for _, it := range sheet.Items[:sheet.N] {
			if !(it.Power >= 0) || math.IsInf(it.Power, 0) {
				t.Fatalf("%s %s: %g W", it.Part, it.Mechanism, it.Power)
			}
		}
	})
}

func TestModelDoesNotAllocate(t *testing.T) {
	m, degC := frozen(mast(), operation(straight(0.21, 6, 1.2)))
	op := operation(straight(0.21, 6, 1.2))
	var power, slope thermal.Vector
	var sheet Sheet
	n := testing.AllocsPerRun(100, func() {
		m.Begin(operation(nil).AgeRatio)
		m.Charge(24, 5)
		m.Freeze(op)
		m.Warm(degC)
		m.Powers(&power, &slope)
		m.Fill(op, &sheet)
	})
	if n != 0 {
		t.Errorf("%v allocations", n)
	}
}

func BenchmarkModel(b *testing.B) {
	op := operation(straight(0.21, 6, 1.2))
	m, degC := frozen(buoy(), op)
	var power, slope thermal.Vector
	var sheet Sheet
	b.Run("begin", func(b *testing.B) {
		for b.Loop() {
			m.Begin(operation(nil).AgeRatio)
			m.Charge(24, 5)
		}
	})
	b.Run("freeze", func(b *testing.B) {
		for b.Loop() {
			m.Freeze(op)
		}
	})
	b.Run("powers", func(b *testing.B) {
		for b.Loop() {
			m.Warm(degC)
			m.Powers(&power, &slope)
		}
	})
	b.Run("fill", func(b *testing.B) {
		for b.Loop() {
			m.Fill(op, &sheet)
		}
	})
}
