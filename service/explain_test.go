package service

import (
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/calc/numeric"
	"railproof/calc/parts"
	"railproof/calc/stage"
)

// Every loss of an ordinary stage is explained: its formula gives the figure.
func TestEveryLossOfAnOrdinaryStageIsExplained(t *testing.T) {
	for _, rectifier := range []stage.Rectifier{stage.Synchronous, stage.DiodeRectified} {
		s := stage.NewStage(rectifier, 2, 1, 0, false, false, false, true)
		s.SwitchingFrequency, s.Inductor.Inductance, s.Inductor.DCResistance, s.Inductor.ACResistanceRatio = 400e3, 10e-6, 9e-3, 3
		s.HighSide.OnResistance, s.LowSide.OnResistance, s.Diode.Threshold, s.Diode.Slope = 9e-3, 4.5e-3, 0.4, 0.02
		s.HighSide.GateCharge, s.LowSide.GateCharge, s.HighSide.GateSwitchCharge = 12e-9, 20e-9, 3e-9
		s.HighSide.OutputCharge, s.LowSide.OutputCharge, s.LowSide.RecoveryCharge = 14e-9, 20e-9, 12e-9
		s.Diode.JunctionCharge, s.Diode.Leakage = 9e-9, numeric.Table{X: []float64{25, 125}, Y: []float64{2e-5, 8e-3}}
		s.Inductor.Core.K, s.Inductor.Core.Alpha, s.Inductor.Core.Beta = 1.9, 1.4, 2.4
		s.Inductor.Core.Turns, s.Inductor.Core.Area, s.Inductor.Core.Volume = 9, 2.1e-5, 8e-7
		for _, c := range []*parts.Capacitor{&s.OutputCapacitors[0], &s.OutputCapacitors[1], &s.InputCapacitors[0]} {
			c.Capacitance, c.Count, c.ESR = 22e-6, 4, 4e-3
		}
		s.Controller.DeadTime, s.Controller.QuiescentCurrent, s.Controller.AuxiliaryPower = 2e-8, 2e-3, 0.05
		s.Diode.Thermal.JunctionToAmbient = 20
		s.Board.SwitchNodePath, s.Board.OutputPath, s.Board.InputPath = 1e-3, 0, 0
		d := &Design{At: "/stage", Stage: s, Assumed: s.ApplyDefaults()}
		require.NoError(t, s.Check())
		p := typical()
		a, err := New(Options{}).Losses(t.Context(), &LossesRequest{Design: *d, Places: []Place{{"/point", p}}})
		require.NoError(t, err)
		require.True(t, a.Status.OK(), "%v", a.Status)
		explained := map[string]bool{}
		for _, e := range ExplainLosses(s, &p, a.Outcomes[0]) {
			explained[e.Quantity] = true
			require.NotEmpty(t, e.Formula)
			require.NotEmpty(t, e.Inputs)
		}
		for _, item := range a.Outcomes[0].Losses.Items[:a.Outcomes[0].Losses.N] {
			if item.Power != 0 {
				require.True(t, explained[item.Part.String()+"/"+item.Mechanism.String()], "%v/%v of %g W", item.Part, item.Mechanism, item.Power)
			}
		}
		require.True(t, explained["efficiency_ratio"])
	}
}
