package service

import (
	"context"
	"fmt"
	"math"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/calc/evaluate"
	"railproof/calc/numeric"
	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/stage"
)

// plain is a synchronous stage of round numbers, with the defaults applied.
func plain() *Design {
	s := stage.NewStage(stage.Synchronous, 1, 1, 0, false, false, false, false)
	s.SwitchingFrequency, s.Inductor.Inductance, s.Inductor.DCResistance = 500e3, 6.8e-6, 7e-3
	s.HighSide.OnResistance, s.LowSide.OnResistance = 9e-3, 4.5e-3
	s.OutputCapacitors[0].Capacitance, s.OutputCapacitors[0].Count, s.OutputCapacitors[0].ESR = 22e-6, 4, 3e-3
	s.InputCapacitors[0].Capacitance, s.InputCapacitors[0].Count, s.InputCapacitors[0].ESR = 4.7e-6, 4, 4e-3
	d := &Design{At: "/stage", Stage: s}
	d.Assumed = s.ApplyDefaults()
	return d
}

func typical() stage.Point {
	return stage.Point{Input: 24, Load: stage.Load{Current: 6}, AmbientDegC: 45, PartTemperatureDegC: parts.Unknown, Control: stage.Control{Kind: stage.RegulateTo, Voltage: 5}}
}

func grid(n int) *GridRequest {
	r := &GridRequest{Design: *plain(), Base: typical(), Quantities: []quantity.ID{quantity.Efficiency, quantity.HighSideJunction, quantity.DiodeJunction}}
	for i := range n {
		r.Input = append(r.Input, 18+14*float64(i)/float64(n))
		r.Load = append(r.Load, 0.1+5.9*float64(i)/float64(n))
	}
	r.Ambient = []float64{-20, 25, 60}
	return r
}

func TestGridIsTheSameOnAnyNumberOfWorkers(t *testing.T) {
	r := grid(20)
	one, err := New(Options{Workers: 1}).LossesGrid(t.Context(), r)
	require.NoError(t, err)
	for _, workers := range []int{2, 7} {
		more, err := New(Options{Workers: workers}).LossesGrid(t.Context(), r)
		require.NoError(t, err)
		require.Equal(t, fmt.Sprint(one.Columns), fmt.Sprint(more.Columns), "by text, since a cell without figures is no number")
		require.Equal(t, one.Cells, more.Cells)
		require.Equal(t, one.Modes, more.Modes)
		require.Equal(t, fmt.Sprint(one.Basis.Cautions), fmt.Sprint(more.Basis.Cautions))
		require.Equal(t, one.Basis.Warnings, more.Basis.Warnings)
		require.Equal(t, fmt.Sprint(effects(one)), fmt.Sprint(effects(more)))
	}
	require.Len(t, one.Columns, 2, "a synchronous stage has no diode")
	require.Len(t, one.Columns[0], r.Count())
}

func effects(a *GridAnswer) (list []Effect) {
	for _, x := range a.Basis.Assumptions {
		if x.Effect != nil {
			list = append(list, *x.Effect)
		}
	}
	return list
}

func TestGridCellsAreThePointsTheySayTheyAre(t *testing.T) {
	s := New(Options{})
	r := grid(5)
	a, err := s.LossesGrid(t.Context(), r)
	require.NoError(t, err)
	for _, i := range []int{0, 7, r.Count() - 1} {
		p, err := s.Losses(t.Context(), &LossesRequest{Design: *plain(), Places: []Place{{At: "/point", Point: r.Cell(i)}}})
		require.NoError(t, err)
		require.Equal(t, p.Outcomes[0].Quantities[quantity.Efficiency], a.Columns[0][i])
	}
}

func TestGridStopsWithItsCaller(t *testing.T) {
	ctx, cancel := context.WithCancel(t.Context())
	cancel()
	_, err := New(Options{}).LossesGrid(ctx, grid(50))
	require.ErrorIs(t, err, context.Canceled)
}

func TestWorstStatusOfManyPoints(t *testing.T) {
	drop, fine := typical(), typical()
	drop.Input = 5.01
	a, err := New(Options{}).Losses(t.Context(), &LossesRequest{Design: *plain(), Places: []Place{{"/points/0", fine}, {"/points/1", drop}}})
	require.NoError(t, err)
	require.Equal(t, evaluate.DropOut, a.Status)
	require.Equal(t, evaluate.OK, a.Outcomes[0].Status)
	require.NotNil(t, a.Outcomes[1].Nearest)
	require.Greater(t, a.Outcomes[1].Nearest.Input, 5.01)
}

func TestEffectOfADefaultIsRecomputedAndTheStageLeftAsItWas(t *testing.T) {
	s := New(Options{})
	d := plain()
	r := &LossesRequest{Design: *d, Places: []Place{{"/point", typical()}}}
	a, err := s.Losses(t.Context(), r)
	require.NoError(t, err)
	loss := a.Outcomes[0].Quantities[quantity.LossTotal]
	found := false
	for _, x := range a.Basis.Assumptions {
		require.NotContains(t, x.Pointer, "/life/", "no life is computed here")
		if x.Pointer != "/stage/controller/quiescent_current_a" {
			continue
		}
		found = true
		require.Equal(t, quantity.LossTotal, x.Effect.Quantity)
		// 4 mA at 24 V
		require.InDelta(t, 0.096, x.Effect.Change, 0.002)
		require.InDelta(t, loss, x.Effect.AtLow, 1e-12)
	}
	require.True(t, found)
	again, err := s.Losses(t.Context(), r)
	require.NoError(t, err)
	require.Equal(t, fmt.Sprint(a.Outcomes[0].Result), fmt.Sprint(again.Outcomes[0].Result))
}

func TestTableReadBeyondItsEndIsAnAssumption(t *testing.T) {
	d := plain()
	d.Stage.Inductor.InductanceAtCurrent = numeric.Table{X: []float64{0, 4, 5}, Y: []float64{1, 0.95, 0.9}}
	a, err := New(Options{}).Losses(t.Context(), &LossesRequest{Design: *d, Places: []Place{{"/point", typical()}}})
	require.NoError(t, err)
	found := false
	for _, x := range a.Basis.Assumptions {
		if x.Pointer == "/stage/inductor/inductance_at_current" {
			found = true
			require.NotNil(t, x.Effect)
			require.Positive(t, x.Effect.Change, "holding the last value gives less ripple")
		}
	}
	require.True(t, found)
}

func TestAnInfiniteFigureIsNoAnswer(t *testing.T) {
	r := evaluate.Result{Status: evaluate.OK}
	r.Quantities[quantity.OutputRipplePP] = math.Inf(1)
	demandFinite(&r)
	require.Equal(t, evaluate.NotConverged, r.Status)
	require.True(t, math.IsNaN(r.Quantities[quantity.Efficiency]))
	require.Zero(t, r.Losses.N)
}

func TestRunawayNamesThePartAndWhereItBegins(t *testing.T) {
	d := plain()
	d.Stage.HighSide.OnResistance = 0.08
	d.Stage.HighSide.OnResistanceTemp = numeric.Table{X: []float64{25, 125}, Y: []float64{1, 3}}
	d.Stage.HighSide.Thermal.JunctionToAmbient = 100
	s := New(Options{})
	at := func(p stage.Point) *Outcome {
		a, err := s.Losses(t.Context(), &LossesRequest{Design: *d, Places: []Place{{"/point", p}}})
		require.NoError(t, err)
		return a.Outcomes[0]
	}
	o := at(typical())
	require.Equal(t, evaluate.Runaway, o.Status)
	require.Equal(t, "high_side", o.Onset.Part.String())
	below, above := typical(), typical()
	below.Load.Current, above.Load.Current = o.Onset.LoadCurrent*0.999, o.Onset.LoadCurrent*1.001
	require.NotEqual(t, evaluate.Runaway, at(below).Status)
	require.Equal(t, evaluate.Runaway, at(above).Status)
}
