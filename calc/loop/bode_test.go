package loop

import (
	"math"
	"math/cmplx"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/calc/parts"
	"railproof/calc/switched"
)

func TestAveragedModelDeviatesLittleAtLowFrequency(t *testing.T) {
	for name, c := range families() {
		for _, mode := range []parts.Modulator{voltageMode(), currentModulator()} {
			kind := map[parts.ModulatorMode]string{parts.VoltageMode: "voltage", parts.PeakCurrentMode: "current"}[mode.Mode]
			t.Run(kind+"/"+name, func(t *testing.T) {
				p := solvedPlant(t, c, 5, mode, transconductor())
				s := sampledOf(t, p)
				var a Averaged
				a.Set(&p)
				g := s.Agreement(&a)
				require.LessOrEqual(t, g.Thousandth, 0.003)
				require.LessOrEqual(t, g.Hundredth, 0.015)
				if p.Mode == switched.Continuous {
					require.LessOrEqual(t, g.Hundredth, 0.003)
					require.LessOrEqual(t, g.Tenth, 0.01)
					require.Greater(t, g.GoodTo, 0.4/c.Period)
				} else {
					// The time that a current takes to come to rest is left out.
					require.Greater(t, g.GoodTo, 0.06/c.Period)
				}
			})
		}
	}
}

func TestSweepUnwrapsThePhase(t *testing.T) {
	p := typeThreePlant(t, 50e3, 55)
	s := sampledOf(t, p)
	var a Averaged
	a.Set(&p)
	f := make([]float64, 300)
	Frequencies(f, 10, 250e3)
	require.InEpsilon(t, 10, f[0], 1e-12)
	require.InEpsilon(t, 250e3, f[299], 1e-12)
	bode := make([]Bode, len(f))
	s.Sweep(&a, f, bode)
	gains := make([]complex128, len(f))
	for i := range bode {
		gains[i] = bode[i].Averaged.Loop
		require.Less(t, bode[i].Deviation, 0.35)
	}
	phase := make([]float64, len(f))
	UnwrappedDeg(phase, gains)
	require.InDelta(t, -90, phase[0], 1)
	for i := 1; i < len(phase); i++ {
		require.Less(t, math.Abs(phase[i]-phase[i-1]), 90.0)
		require.InDelta(t, 0, cmplx.Abs(cmplx.Rect(1, radians(phase[i]))-gains[i]/complex(cmplx.Abs(gains[i]), 0)), 1e-9)
	}
	UnwrappedDeg(phase[:1], []complex128{-1i})
	require.InDelta(t, -90, phase[0], 1e-12)
	UnwrappedDeg(phase[:1], []complex128{cmplx.Rect(1, math.Pi)})
	require.InDelta(t, -180, phase[0], 1e-12)
}

func TestCurrentLoopFiguresAgreeWithTheExactEigenvalue(t *testing.T) {
	for _, vin := range []float64{8, 12, 24} {
		for _, slope := range []float64{3e4, 1e5} {
			c := buoy()
			c.Vin = vin
			c.Bank[0].C = 2e-3 // little ripple: that at the comparator is part of the exact slope
			m := currentModulator()
			m.Slope = slope
			p := solvedPlant(t, c, 5, m, transconductor())
			x := marginsOf(t, p)
			figures := p.CurrentLoop()
			require.InDelta(t, figures.Eigenvalue, real(x.CurrentLoop), 0.03, "Vin %g, slope %g", vin, slope)
			require.Equal(t, figures.Stable(), !x.Subharmonic)
			for _, n := range []int{2, 3, 6} {
				p := solvedPlant(t, phases(c, n), 5, m, transconductor())
				x := marginsOf(t, p)
				require.InDelta(t, p.CurrentLoop().Eigenvalue, real(x.CurrentLoop), 0.05, "%d phases", n)
				require.Equal(t, p.CurrentLoop().Stable(), !x.Subharmonic)
			}
		}
	}
}
