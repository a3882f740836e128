package service

import (
	"testing"

	"github.com/stretchr/testify/require"
)

// The coefficient of a gauss or kilohertz form, typed as it is printed, is told.
func TestAbsurdCoreLossIsTold(t *testing.T) {
	codes := func(k float64) []string {
		d := plain()
		c := &d.Stage.Inductor.Core
		c.Present, c.K, c.Alpha, c.Beta, c.Turns, c.Area, c.Volume, c.BandLow, c.BandHigh = true, k, 1.4, 2.4, 9, 2.1e-5, 8e-7, 0.7, 1.3
		p := typical()
		p.PartTemperatureDegC = 25 // such a loss has no equilibrium
		a, err := New(Options{}).Losses(t.Context(), &LossesRequest{Design: *d, Places: []Place{{"/point", p}}})
		require.NoError(t, err)
		var list []string
		for _, w := range a.Basis.Warnings {
			if w.Pointer == "/stage/inductor/core/steinmetz/k" {
				list = append(list, w.Code)
			}
		}
		return list
	}
	require.Empty(t, codes(1.9))
	require.Equal(t, []string{"core-power-density"}, codes(1.9e3))
}
