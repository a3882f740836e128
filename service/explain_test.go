package service

import (
	"fmt"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/calc/numeric"
	"railproof/calc/parts"
	"railproof/calc/stage"
)

// everyLoss is a stage with every mechanism that its rectifier can have.
func everyLoss(t *testing.T, rectifier stage.Rectifier, phases int, unequal bool) *stage.Stage {
	t.Helper()
	overrides := 0
	if unequal {
		overrides = phases
	}
	s := stage.NewStage(rectifier, 2, 2, overrides, false, false, false, true)
	s.PhaseCount = phases
	if unequal {
		s.Phases[1].Inductance, s.Phases[phases-1].HighSideOn, s.Phases[0].DCResistance = 8e-6, 12e-3, 14e-3
	}
	s.SwitchingFrequency, s.Inductor.Inductance, s.Inductor.DCResistance, s.Inductor.ACResistanceRatio = 400e3, 10e-6, 9e-3, 3
	s.Inductor.InductanceAtCurrent = numeric.Table{X: []float64{0, 4, 10}, Y: []float64{1, 0.95, 0.7}}
	s.HighSide.OnResistance, s.LowSide.OnResistance, s.Diode.Threshold, s.Diode.Slope = 9e-3, 4.5e-3, 0.4, 0.02
	s.HighSide.GateCharge, s.LowSide.GateCharge, s.HighSide.GateSwitchCharge = 12e-9, 20e-9, 3e-9
	s.HighSide.OutputCharge, s.LowSide.OutputCharge, s.LowSide.RecoveryCharge = 14e-9, 20e-9, 12e-9
	s.Diode.JunctionCharge, s.Diode.RecoveryCharge = 9e-9, 5e-9
	s.Diode.Leakage = numeric.Table{X: []float64{25, 125}, Y: []float64{2e-5, 8e-3}}
	s.Inductor.Core.K, s.Inductor.Core.Alpha, s.Inductor.Core.Beta = 1.9, 1.4, 2.4
	s.Inductor.Core.Turns, s.Inductor.Core.Area, s.Inductor.Core.Volume = 9, 2.1e-5, 8e-7
	for _, c := range []*parts.Capacitor{&s.OutputCapacitors[0], &s.OutputCapacitors[1], &s.InputCapacitors[0], &s.InputCapacitors[1]} {
		c.Capacitance, c.Count, c.ESR = 22e-6, 4, 4e-3
	}
	s.InputCapacitors[1].ESR = 50e-3
	s.Controller.DeadTime, s.Controller.QuiescentCurrent, s.Controller.AuxiliaryPower = 2e-8, 2e-3, 0.05
	s.Diode.Thermal.JunctionToAmbient = 20
	s.Board.SwitchNodePath, s.Board.OutputPath, s.Board.InputPath = 1e-3, 2e-3, 3e-3
	s.ApplyDefaults()
	require.NoError(t, s.Check())
	return s
}

// Every loss is explained: its formula gives the figure, whatever the rectifier,
// the conduction mode, the temperatures and the phases.
func TestEveryLossIsExplained(t *testing.T) {
	modes := map[string]int{}
	explain := func(t *testing.T, s *stage.Stage, p *stage.Point) {
		t.Helper()
		a, err := New(Options{}).Losses(t.Context(), &LossesRequest{Design: Design{At: "/stage", Stage: s}, Places: []Place{{"/point", *p}}})
		require.NoError(t, err)
		require.True(t, a.Status.Figures(), "%v", a.Status)
		o := a.Outcomes[0]
		modes[fmt.Sprint(o.Mode)]++
		explained := map[string]bool{}
		for _, e := range ExplainLosses(s, p, o) {
			explained[e.Quantity] = true
			require.NotEmpty(t, e.Formula)
			require.NotEmpty(t, e.Inputs)
			require.NotEmpty(t, e.Source)
		}
		for i := range o.Losses.Items[:o.Losses.N] {
			item := &o.Losses.Items[i]
			require.True(t, explained[item.Part.String()+"/"+item.Mechanism.String()], "%v/%v of %g W", item.Part, item.Mechanism, item.Power)
		}
		require.True(t, explained["efficiency_ratio"])
	}
	for _, rectifier := range []stage.Rectifier{stage.Synchronous, stage.SynchronousEmulated, stage.DiodeRectified} {
		for _, layout := range []struct {
			phases  int
			unequal bool
		}{{1, false}, {3, false}, {3, true}} {
			s := everyLoss(t, rectifier, layout.phases, layout.unequal)
			for _, load := range []float64{0.05, 0.5, 6} {
				p := typical()
				p.Load.Current, p.SourceResistance = load, 0.05
				t.Run(fmt.Sprintf("%v/%v/%g", rectifier, layout, load), func(t *testing.T) { explain(t, s, &p) })
			}
		}
	}
	t.Run("held, on all the time, with a resistor as load", func(t *testing.T) {
		p := typical()
		p.PartTemperatureDegC, p.Input, p.Load.Conductance = 60, 5, 0.1
		p.Control = stage.Control{Kind: stage.FixedDuty, Duty: 1}
		explain(t, everyLoss(t, stage.Synchronous, 1, false), &p)
	})
	require.Len(t, modes, 2, "both conduction modes occur")
}
