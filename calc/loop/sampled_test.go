package loop

import (
	"math"
	"math/cmplx"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/calc/switched"
)

func sampledOf(t testing.TB, p Plant) *Sampled {
	t.Helper()
	require.NoError(t, p.Check())
	s := &Sampled{}
	require.True(t, s.Set(&p).OK(), "status %d", s.Status)
	return s
}

func families() map[string]switched.Circuit {
	return map[string]switched.Circuit{
		"ccm/one-bank":          buoy(),
		"ccm/two-banks":         twoBanks(buoy()),
		"ccm/two-phases":        phases(buoy(), 2),
		"ccm/three-phases":      phases(twoBanks(buoy()), 3),
		"ccm/six-phases":        phases(buoy(), 6),
		"dcm/one-bank":          diodeLight(buoy()),
		"dcm/two-banks":         diodeLight(twoBanks(buoy())),
		"dcm/two-phases":        diodeLight(phases(buoy(), 2)),
		"ccm/diode":             func() switched.Circuit { c := diodeLight(buoy()); c.Current = 5; return c }(),
		"ccm/resistive-no-load": func() switched.Circuit { c := buoy(); c.Current = 0; c.Conductance = 1e-9; return c }(),
	}
}

func TestDutyGainIsTheDerivativeOfTheSteadyState(t *testing.T) {
	for name, c := range families() {
		t.Run(name, func(t *testing.T) {
			p := solvedPlant(t, c, 5, voltageMode(), typeThree())
			got, ok := sampledOf(t, p).DutyGain()
			require.True(t, ok)
			var solver switched.Solver
			mean := func(d float64) float64 {
				var s switched.Solution
				solver.FixedDuty(&c, d, &s)
				require.True(t, s.Status.OK())
				return s.OutputMean
			}
			h := 1e-4 * p.Duty
			want := (8*(mean(p.Duty+h)-mean(p.Duty-h)) - (mean(p.Duty+2*h) - mean(p.Duty-2*h))) / (12 * h)
			require.InEpsilon(t, want, got, 1e-6)
		})
	}
}

func TestPeriodicStateAgreesWithTheSteadyStateSolver(t *testing.T) {
	for name, c := range families() {
		t.Run(name, func(t *testing.T) {
			p := solvedPlant(t, c, 5, voltageMode(), typeThree())
			s := sampledOf(t, p)
			var solver switched.Solver
			var want switched.Solution
			solver.FixedDuty(&c, p.Duty, &want)
			require.InDelta(t, want.Leg.TurnOff, s.start[0], 1e-7*max(1, math.Abs(want.Leg.TurnOff)))
			require.InDelta(t, 0, s.Error, 1e-9, "an ideal integrator leaves no error")
		})
	}
}

func TestAveragedAgreesWithSampledAtLowFrequency(t *testing.T) {
	for name, c := range families() {
		if c.Leg.Rectifier.Blocks && c.Current < 1 {
			continue
		}
		t.Run(name, func(t *testing.T) {
			p := solvedPlant(t, c, 5, voltageMode(), typeThree())
			s := sampledOf(t, p)
			var a Averaged
			a.Set(&p)
			f := 1e-3 / c.Period
			x, y := a.At(f), s.At(f)
			for _, pair := range [][2]complex128{{x.Duty, y.Duty}, {x.Line, y.Line}, {x.Impedance, y.Impedance}} {
				require.Less(t, cmplx.Abs(pair[0]/pair[1]-1), 1e-6)
			}
			// The ripple at the comparator takes some gain away.
			require.Less(t, cmplx.Abs(x.Loop/y.Loop-1), 0.05)
			require.Less(t, cmplx.Abs(x.ClosedImpedance/y.ClosedImpedance-1), 0.02)
			require.Less(t, cmplx.Abs(x.ClosedLine/y.ClosedLine-1), 0.05)
		})
	}
}
