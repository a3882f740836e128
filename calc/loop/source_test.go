package loop

import (
	"math"
	"math/cmplx"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/calc/switched"
)

func TestOptimumDampingIsTheMinimum(t *testing.T) {
	const lf, cf = 1e-6, 4e-6
	r0 := math.Sqrt(lf / cf)
	for _, n := range []float64{0.3, 1, 4} {
		for kind, build := range map[DampingKind]func(r float64) Source{
			CapacitorBranch: func(r float64) Source {
				return Source{Present: true, Inductance: lf, Shunts: 2, Shunt: [MaxShunts]switched.Bank{{C: cf, ESR: 1e-9}, {C: n * cf, ESR: r}}}
			},
			InductorBranch: func(r float64) Source {
				return Source{Present: true, Inductance: lf, Damping: AcrossInductor, DampOhm: r, DampH: n * lf, Shunts: 1, Shunt: [MaxShunts]switched.Bank{{C: cf, ESR: 1e-9}}}
			},
			InductorSeriesBranch: func(r float64) Source {
				return Source{Present: true, Inductance: lf, Damping: InSeries, DampOhm: r, DampH: n * lf, Shunts: 1, Shunt: [MaxShunts]switched.Bank{{C: cf, ESR: 1e-9}}}
			},
		} {
			peak := func(r float64) float64 {
				s := build(r)
				most := 0.0
				f0 := 1 / (2 * math.Pi * math.Sqrt(lf*cf))
				for f := f0 / 10; f < 10*f0; f *= 1.002 {
					most = max(most, cmplx.Abs(s.Impedance(f)))
				}
				return most
			}
			o := OptimumDamping(kind, lf, cf, n)
			require.InEpsilon(t, o.Peak, peak(o.Resistance), 1e-3, "kind %d, n %g, R/R0 %g", kind, n, o.Resistance/r0)
			require.Greater(t, peak(o.Resistance*1.05), o.Peak)
			require.Greater(t, peak(o.Resistance/1.05), o.Peak)
		}
	}
}

func TestJointSourceHasItsImpedance(t *testing.T) {
	// The output impedance of a bridge that is always on is that of the source in
	// series with the leg, in parallel with the banks: seen through the averaged
	// model's load port this checks the states of every source.
	for name, s := range sources() {
		t.Run(name, func(t *testing.T) {
			p := solvedPlant(t, buoy(), 5, voltageMode(), typeThree())
			p.Duty = 0.9999999
			p.Source = s
			x := sampledOf(t, p)
			for _, f := range []float64{300, 3e3, 20e3} {
				leg := p.Circuit.Leg
				series := complex(leg.Winding+leg.HighSide, 2*math.Pi*f*leg.L) + s.Impedance(f)
				b := p.Circuit.Bank[0]
				bank := complex(b.ESR, 0) + 1/complex(0, 2*math.Pi*f*b.C)
				want := parallel(series, bank)
				require.Less(t, cmplx.Abs(x.At(f).Impedance/want-1), 1e-4, "%g Hz", f)
			}
		})
	}
}

func sources() map[string]Source {
	banks := []switched.Bank{{C: 20e-6, ESR: 5e-3}, {C: 100e-6, ESR: 0.15}}
	damped := FromBanks(1e-6, 0.02, banks[:1])
	damped.Damping, damped.DampOhm, damped.DampH = AcrossInductor, 0.3, 0.5e-6
	series := damped
	series.Damping = InSeries
	return map[string]Source{
		"resistance":        FromBanks(0, 0.05, banks),
		"inductor":          FromBanks(1e-6, 0.02, banks),
		"damped-across":     damped,
		"damped-in-series":  series,
		"resistance-alone":  FromBanks(0, 0.05, nil),
		"inductor-one-bank": FromBanks(0.3e-6, 0.05, banks[:1]),
	}
}

func TestSourceChangesTheLoopAsTheImpedancesSay(t *testing.T) {
	p := typeThreePlant(t, 20e3, 55)
	for name, s := range sources() {
		t.Run(name, func(t *testing.T) {
			q := p
			q.Source = s
			var a Averaged
			a.Set(&p)
			x := sampledOf(t, q)
			plain := sampledOf(t, p)
			for _, f := range []float64{100, 1e3, 5e3, 12e3, 20e3} {
				// The duty ratio belongs to the stiff source; the factor that the
				// source brings is compared, not the loop gain itself.
				want := a.InteractionAt(&s, f).Loop / a.Loop(f)
				got := x.Loop(f) / plain.Loop(f)
				require.Less(t, cmplx.Abs(got/want-1), 0.06, "%g Hz: got %v, want %v", f, got, want)
			}
		})
	}
}

// An undamped filter of high impedance makes a regulated stage oscillate; the
// optimum damping for it does not. The eigenvalues tell, and the separation of the
// impedances agrees.
func TestInputFilterMayUnsettleTheStage(t *testing.T) {
	p := typeThreePlant(t, 40e3, 60)
	const lf, cf = 22e-6, 10e-6
	bad := FromBanks(lf, 1e-3, []switched.Bank{{C: cf, ESR: 2e-3}})
	o := OptimumDamping(CapacitorBranch, lf, cf, 8)
	good := FromBanks(lf, 1e-3, []switched.Bank{{C: cf, ESR: 2e-3}, {C: 8 * cf, ESR: o.Resistance}})
	var a Averaged
	a.Set(&p)
	for _, c := range []struct {
		source Source
		want   Stability
	}{{bad, Unstable}, {good, Stable}} {
		q := p
		q.Source = c.source
		require.Equal(t, c.want, marginsOf(t, q).Stability)
		m := a.SourceMargins(&c.source)
		require.Equal(t, c.want == Stable, m.Input > Customary, "%+v", m)
	}
}

func TestLowFrequencyInputResistanceIsThatOfConstantPower(t *testing.T) {
	for name, c := range families() {
		t.Run(name, func(t *testing.T) {
			if c.Current == 0 {
				t.Skip("without a load the input resistance is not that of a constant power")
			}
			p := solvedPlant(t, c, 5, voltageMode(), typeThree())
			var a Averaged
			a.Set(&p)
			s := FromBanks(0, 1e-3, nil)
			got := a.InteractionAt(&s, 1).Closed
			// Losses take a part of the power and its slope.
			want := NegativeResistance(c.Vin, (c.Current+c.Conductance*5)*5)
			require.InEpsilon(t, want, real(got), 0.15)
		})
	}
}
