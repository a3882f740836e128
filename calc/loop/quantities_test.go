package loop

import (
	"math"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/calc/evaluate"
	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/stage"
)

// rail is a small stage with a loop, every default applied.
func rail(t testing.TB) (*stage.Stage, stage.Point) {
	t.Helper()
	s := stage.NewStage(stage.Synchronous, 1, 0, 0, true, true, true, false)
	s.Name = "rail"
	s.SwitchingFrequency = 500e3
	s.HighSide.OnResistance, s.LowSide.OnResistance = 9e-3, 4.5e-3
	s.Inductor.Inductance, s.Inductor.DCResistance = 6.8e-6, 7e-3
	s.OutputCapacitors[0].Capacitance, s.OutputCapacitors[0].Count, s.OutputCapacitors[0].ESR = 22e-6, 4, 3e-3
	s.Modulator.Ramp = 1.2
	s.Compensator.Type = parts.OpAmpType3
	for id, v := range map[string]float64{
		"compensator/feedback_ohm": 15e3, "compensator/feedback_f": 1.5e-9, "compensator/shunt_f": 22e-12, "compensator/lead_ohm": 1e3, "compensator/lead_f": 330e-12,
		"feedback/reference_v": 0.8, "feedback/upper_ohm": 56.2e3, "feedback/lower_ohm": 10.7e3,
	} {
		*s.Field(id) = v
	}
	s.ApplyDefaults()
	require.NoError(t, s.Check())
	return s, stage.Point{Input: 24, Load: stage.Load{Current: 3}, AmbientDegC: 25, PartTemperatureDegC: parts.Unknown, Control: stage.Control{Kind: stage.ByFeedback}}
}

func TestQuantitiesOfAnEvaluatedStage(t *testing.T) {
	s, p := rail(t)
	e := evaluate.Prepare(s)
	var r evaluate.Result
	e.Eval(&p, &r)
	require.True(t, r.Status.OK())
	var a Analyser
	status, err := a.Fill(e, r.Status, &r.Quantities)
	require.NoError(t, err)
	require.Equal(t, Analysed, status)
	require.Equal(t, Stable, a.Margins.Stability)
	for _, id := range []quantity.ID{quantity.Crossover, quantity.PhaseMargin, quantity.GainMargin, quantity.ModulusMargin} {
		require.Positive(t, r.Quantities[id], id.Key())
	}
	require.InDelta(t, 0, a.Sampled.Error, 1e-8)

	// Less capacitance, as of a worse substitute: less margin.
	before := r.Quantities[quantity.PhaseMargin]
	*e.Stage().Field("output_capacitors/0/capacitance_f") /= 8
	e.Eval(&p, &r)
	_, err = a.Fill(e, r.Status, &r.Quantities)
	require.NoError(t, err)
	require.Less(t, r.Quantities[quantity.PhaseMargin], before-5)
	require.Zero(t, testing.AllocsPerRun(5, func() { _, _ = a.Fill(e, r.Status, &r.Quantities) }))

	// Drop-out: nothing regulates, so there is no loop.
	p.Input = 4
	e.Eval(&p, &r)
	status, err = a.Fill(e, r.Status, &r.Quantities)
	require.NoError(t, err)
	require.Equal(t, NotRegulating, status)
	require.True(t, math.IsNaN(r.Quantities[quantity.PhaseMargin]))
}

func TestMarginsOfAnUnstableLoopCannotPassALimit(t *testing.T) {
	var q quantity.Vector
	for _, m := range []Margins{
		marginsOf(t, scaled(typeThreePlant(t, 50e3, 55), 6)),
		{Status: Analysed, Stability: Unstable, Crossover: 5e4, PhaseMargin: 40, GainMargin: 8, Modulus: 0.4},
		{Status: NotRegulating},
	} {
		m.Fill(&q)
		for _, id := range []quantity.ID{quantity.PhaseMargin, quantity.GainMargin, quantity.ModulusMargin} {
			require.False(t, q[id] >= 0, "%s %g", id.Key(), q[id])
		}
	}
	m := Margins{Status: Analysed, Stability: Stable, PhaseMargin: 60, GainMargin: math.NaN(), Modulus: 0.8}
	m.Fill(&q)
	require.Equal(t, GainMarginCeiling, q[quantity.GainMargin], "no phase crossing is no failure")
}

func TestSourceBringsTheInputBanksIn(t *testing.T) {
	s, p := rail(t)
	s.InputCapacitors = append(s.InputCapacitors, s.OutputCapacitors[0])
	s.InputCapacitors[0].Count = 2
	e := evaluate.Prepare(s)
	var r evaluate.Result
	e.Eval(&p, &r)
	var plant Plant
	require.True(t, plant.Bind(e, r.Status))
	filter := Source{Inductance: 1e-6, Resistance: 20e-3, Shunts: 1}
	filter.Shunt[0].C, filter.Shunt[0].ESR = 100e-6, 0.1
	plant.Behind(e, filter)
	require.NoError(t, plant.Check())
	require.Equal(t, 2, plant.Source.Shunts)
	require.InEpsilon(t, 44e-6, plant.Source.Shunt[1].C, 1e-9)
	require.Equal(t, Stable, marginsOf(t, plant).Stability)
}
