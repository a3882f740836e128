package evaluate_test

import (
	"math"
	"testing"

	"github.com/stretchr/testify/assert"
	"github.com/stretchr/testify/require"

	"railproof/calc/evaluate"
	"railproof/calc/losses"
	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/stage"
)

func TestDropOutIsAnAnswerWithTheNearestInput(t *testing.T) {
	s, p := example(t, "buoy-5v0")
	p.Input = 5.1
	e := evaluate.Prepare(s)
	var r evaluate.Result
	e.Eval(&p, &r)
	require.Equal(t, evaluate.DropOut, r.Status)
	assert.Less(t, r.Quantities[quantity.OutputMean], 5.0)
	n := e.Nearest(&p, r.Status)
	require.True(t, parts.Known(n.Input))
	p.Input = n.Input
	e.Eval(&p, &r)
	assert.Equal(t, evaluate.OK, r.Status)
	p.Input = n.Input * (1 - 1e-4)
	e.Eval(&p, &r)
	assert.Equal(t, evaluate.DropOut, r.Status)
}

func TestTooShortOnTimeNamesTheLeastLoad(t *testing.T) {
	s, p := example(t, "mast-12v0")
	s.Controller.MinOnTime = 6e-7
	p.Input, p.Load.Current = 32, 1e-3
	e := evaluate.Prepare(s)
	var r evaluate.Result
	e.Eval(&p, &r)
	require.Equal(t, evaluate.TooShortOnTime, r.Status)
	n := e.Nearest(&p, r.Status)
	require.True(t, parts.Known(n.LoadCurrent))
	p.Load.Current = n.LoadCurrent
	e.Eval(&p, &r)
	assert.Equal(t, evaluate.OK, r.Status)
	p.Load.Current = n.LoadCurrent * 0.999
	e.Eval(&p, &r)
	assert.Equal(t, evaluate.TooShortOnTime, r.Status)
}

// Where the output is not the regulated one, capacitors are biased by the voltage there
// is, and gates driven from it.
func TestOutputOutOfRegulationIsFollowed(t *testing.T) {
	for _, c := range []struct {
		name, rail string
		alter      func(*stage.Point)
		status     evaluate.Status
	}{
		{"drop-out", "buoy-5v0", func(p *stage.Point) { p.Input = 4 }, evaluate.DropOut},
		{"too short", "buoy-3v3", func(p *stage.Point) { p.Input, p.Load.Current = 40, 1e-5 }, evaluate.TooShortOnTime},
	} {
		t.Run(c.name, func(t *testing.T) {
			s, p := example(t, c.rail)
			c.alter(&p)
			s.Controller.DriveSupply = parts.DriveFromOutput
			e := evaluate.Prepare(s)
			var r evaluate.Result
			e.Eval(&p, &r)
			require.Equal(t, c.status, r.Status)
			vo := r.Quantities[quantity.OutputMean]
			require.Greater(t, math.Abs(vo/p.Control.Voltage-1), 0.05)
			gate := 0.0
			for _, item := range r.Losses.Items[:r.Losses.N] {
				if item.Mechanism == losses.GateDrive {
					gate = item.Power
				}
			}
			want := losses.GateDriveLoss(s.HighSide.GateCharge+s.LowSide.GateCharge, vo, s.SwitchingFrequency)
			assert.InEpsilon(t, want, gate, 1e-6)
			bank := &s.OutputCapacitors[0]
			assert.InEpsilon(t, bank.CapacitanceAt(vo, r.PartDegC[losses.OutputCapacitor], p.AgeRatio), r.Quantities[quantity.OutputCapacitanceEffective], 1e-6)
		})
	}
}

// A source too weak for the load ends in drop-out where the load shrinks with the
// voltage, and at no operating point where it does not; never unsettled.
func TestWeakSourceIsTold(t *testing.T) {
	s, p := example(t, "buoy-5v0")
	e := evaluate.Prepare(s)
	for _, ohm := range []float64{0.3, 0.6, 0.8, 1.2, 2, 5, 20} {
		for _, vin := range []float64{4, 5.2, 8, 12, 24} {
			p.Input, p.SourceResistance = vin, ohm
			var r evaluate.Result
			p.Load = stage.Load{Conductance: 1.2}
			e.Eval(&p, &r)
			require.Contains(t, []evaluate.Status{evaluate.OK, evaluate.DropOut}, r.Status, "%g V behind %g ohm", vin, ohm)
			in := r.Quantities[quantity.InputMean]
			assert.InDelta(t, vin, r.Quantities[quantity.BridgeVoltage]+(ohm+s.Board.InputPath)*in, 1e-3*vin, "the source's own law")
			p.Load = stage.Load{Current: 6}
			e.Eval(&p, &r)
			assert.Contains(t, []evaluate.Status{evaluate.OK, evaluate.DropOut, evaluate.NoOperatingPoint}, r.Status, "%g V behind %g ohm", vin, ohm)
			if ohm*5 > vin { // less than 5 A even into a short
				assert.Equal(t, evaluate.NoOperatingPoint, r.Status, "%g V behind %g ohm", vin, ohm)
			}
		}
	}
}

func TestOverTemperatureGivesEveryFigureAndWhereItBegins(t *testing.T) {
	s, p := example(t, "buoy-5v0")
	s.HighSide.Rating.JunctionDegC = 70
	p.AmbientDegC = 60
	e := evaluate.Prepare(s)
	var r evaluate.Result
	e.Eval(&p, &r)
	require.Equal(t, evaluate.OverTemperature, r.Status)
	assert.Greater(t, r.Quantities[quantity.HighSideJunction], 70.0)
	n := e.Nearest(&p, r.Status)
	p.AmbientDegC = n.AmbientDegC
	e.Eval(&p, &r)
	assert.Equal(t, evaluate.OK, r.Status)
	assert.InDelta(t, 70, r.Quantities[quantity.HighSideJunction], 1e-2)
}

// Resistive loss that grows faster than the heat leaves has no equilibrium: the
// closed form of power-stage case ps-th-08 sets the limit R_th P25 a = 1.
func TestRunawayBeginsWhereTheClosedFormSays(t *testing.T) {
	s, p := example(t, "buoy-5v0")
	s.Inductor.Thermal.JunctionToAmbient = 1500
	e := evaluate.Prepare(s)
	var r evaluate.Result
	e.Eval(&p, &r)
	require.Equal(t, evaluate.Runaway, r.Status)
	assert.False(t, parts.Known(r.Quantities[quantity.Efficiency]), "no figures of a state that does not exist")
	n := e.Nearest(&p, r.Status)
	require.True(t, parts.Known(n.LoadCurrent))
	for _, load := range []float64{n.LoadCurrent, n.LoadCurrent * 1.3} {
		q := p
		q.Load.Current = load
		e.Eval(&q, &r)
		t.Logf("load %.3f A: %v, feedback %.3f", load, r.Status, r.Quantities[quantity.ThermalFeedback])
	}
}

func TestNoOperatingPointWhenTheLoadDragsTheOutputDown(t *testing.T) {
	s, p := example(t, "buoy-5v0")
	p.Control = stage.Control{Kind: stage.FixedDuty, Duty: 1e-3}
	p.Load.Current = 6
	e := evaluate.Prepare(s)
	var r evaluate.Result
	e.Eval(&p, &r)
	require.Equal(t, evaluate.NoOperatingPoint, r.Status)
}

func TestEqualOverridesAreEqualPhases(t *testing.T) {
	s, p := example(t, "buoy-5v0")
	s.PhaseCount = 3
	p.Load.Current = 15
	same := s.Clone()
	for range s.PhaseCount {
		same.Phases = append(same.Phases, stage.PhaseOverride{
			Inductance: s.Inductor.Inductance, DCResistance: s.Inductor.DCResistance,
			HighSideOn: s.HighSide.OnResistance, LowSideOn: s.LowSide.OnResistance,
		})
	}
	var a, b evaluate.Result
	evaluate.Prepare(s).Eval(&p, &a)
	evaluate.Prepare(same).Eval(&p, &b)
	require.Equal(t, evaluate.OK, a.Status)
	require.Equal(t, evaluate.OK, b.Status)
	for _, info := range quantity.All() {
		x, y := a.Quantities[info.ID], b.Quantities[info.ID]
		if parts.Known(x) && info.ID != quantity.EnergyBalance {
			within := 1e-6 * (1e-6 + max(x, -x))
			if info.Unit == "Cel" {
				within = 5e-4 // what the iteration may leave
			}
			assert.InDelta(t, x, y, within, info.Key)
		}
	}
}

func TestUnequalPhasesShowTheWorstOne(t *testing.T) {
	s, p := example(t, "buoy-5v0")
	s.PhaseCount = 2
	p.Load.Current = 12
	for k := range s.PhaseCount {
		o := stage.PhaseOverride{Inductance: parts.Unknown, DCResistance: parts.Unknown, HighSideOn: parts.Unknown, LowSideOn: parts.Unknown}
		if k == 1 {
			o.Inductance = 0.7 * s.Inductor.Inductance
			o.DCResistance = 0.5 * s.Inductor.DCResistance
		}
		s.Phases = append(s.Phases, o)
	}
	var r, mean evaluate.Result
	evaluate.Prepare(s).Eval(&p, &r)
	require.Equal(t, evaluate.OK, r.Status)
	assert.Greater(t, r.Quantities[quantity.InductorMean], 6.0)
	equal := s.Clone()
	equal.Phases = nil
	evaluate.Prepare(equal).Eval(&p, &mean)
	assert.Greater(t, r.Quantities[quantity.HighSideJunction], mean.Quantities[quantity.HighSideJunction]+1,
		"the phase that carries more is hotter than equal phases would be")
	assert.InDelta(t, 0, (r.Quantities[quantity.InputPower]-r.Quantities[quantity.OutputPower]-r.Quantities[quantity.LossTotal])/60, 1e-9)
}
