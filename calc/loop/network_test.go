package loop

import (
	"math"
	"math/cmplx"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/calc/parts"
)

func compensators() map[string]parts.Compensator {
	inf := math.Inf(1)
	base := parts.Compensator{
		Present: true, FeedbackOhm: 12e3, FeedbackF: 3.3e-9, ShuntF: 47e-12, LeadOhm: 1e3, LeadF: 330e-12,
		GainBandwidth: inf, OpenLoopGain: inf, Transconductance: 1e-3, OutputOhm: inf,
	}
	with := func(change func(c *parts.Compensator)) parts.Compensator {
		c := base
		change(&c)
		return c
	}
	return map[string]parts.Compensator{
		"type-one":                with(func(c *parts.Compensator) { c.Type = parts.OpAmpType1 }),
		"type-two":                with(func(c *parts.Compensator) { c.Type = parts.OpAmpType2 }),
		"type-two/no-shunt":       with(func(c *parts.Compensator) { c.Type, c.ShuntF = parts.OpAmpType2, 0 }),
		"type-two/no-resistor":    with(func(c *parts.Compensator) { c.Type, c.FeedbackOhm = parts.OpAmpType2, 0 }),
		"type-three":              with(func(c *parts.Compensator) { c.Type = parts.OpAmpType3 }),
		"type-three/no-shunt":     with(func(c *parts.Compensator) { c.Type, c.ShuntF = parts.OpAmpType3, 0 }),
		"type-three/slow":         with(func(c *parts.Compensator) { c.Type, c.GainBandwidth = parts.OpAmpType3, 5e6 }),
		"type-three/slow-finite":  with(func(c *parts.Compensator) { c.Type, c.GainBandwidth, c.OpenLoopGain = parts.OpAmpType3, 5e6, 1e4 }),
		"type-three/finite":       with(func(c *parts.Compensator) { c.Type, c.OpenLoopGain = parts.OpAmpType3, 1e3 }),
		"type-two/slow/no-shunt":  with(func(c *parts.Compensator) { c.Type, c.GainBandwidth, c.ShuntF = parts.OpAmpType2, 5e6, 0 }),
		"type-one/slow":           with(func(c *parts.Compensator) { c.Type, c.GainBandwidth = parts.OpAmpType1, 5e6 }),
		"ota-two":                 with(func(c *parts.Compensator) { c.Type = parts.TransconductanceType2 }),
		"ota-two/finite":          with(func(c *parts.Compensator) { c.Type, c.OutputOhm = parts.TransconductanceType2, 2e6 }),
		"ota-two/no-shunt":        with(func(c *parts.Compensator) { c.Type, c.ShuntF = parts.TransconductanceType2, 0 }),
		"ota-two/no-resistor":     with(func(c *parts.Compensator) { c.Type, c.FeedbackOhm = parts.TransconductanceType2, 0 }),
		"ota-three":               with(func(c *parts.Compensator) { c.Type = parts.TransconductanceType3 }),
		"ota-three/no-lead-ohm":   with(func(c *parts.Compensator) { c.Type, c.LeadOhm = parts.TransconductanceType3, 0 }),
		"ota-three/finite/no-cap": with(func(c *parts.Compensator) { c.Type, c.OutputOhm, c.ShuntF = parts.TransconductanceType3, 5e6, 0 }),
	}
}

// transferOf is the frequency response of the state form, from vo to -vc.
func transferOf(n *Network, f float64) complex128 {
	var a [MaxCompensatorStates][MaxCompensatorStates + 1]complex128
	for i := range n.N {
		for k := range n.N {
			a[i][k] = complex(-n.A[i][k], 0)
		}
		a[i][i] += complex(0, 2*math.Pi*f)
		a[i][n.N] = complex(n.B[i][0], 0)
	}
	for i := range n.N {
		for r := i + 1; r < n.N; r++ {
			if cmplx.Abs(a[r][i]) > cmplx.Abs(a[i][i]) {
				a[i], a[r] = a[r], a[i]
			}
		}
		for r := range n.N {
			if r == i {
				continue
			}
			g := a[r][i] / a[i][i]
			for k := i; k <= n.N; k++ {
				a[r][k] -= g * a[i][k]
			}
		}
	}
	y := complex(n.D[0], 0)
	for i := range n.N {
		y += complex(n.C[i], 0) * a[i][n.N] / a[i][i]
	}
	return -y
}

func TestStateFormOfTheNetworkHasTheClosedFormsGain(t *testing.T) {
	f := divider(5)
	for name, c := range compensators() {
		t.Run(name, func(t *testing.T) {
			var n Network
			n.Build(&c, &f, Linear, Limits{})
			for _, frequency := range []float64{1, 100, 5e3, 50e3, 250e3, 3e6} {
				want := CompensatorGain(&c, &f, frequency)
				got := transferOf(&n, frequency)
				require.Less(t, cmplx.Abs(got-want), 1e-8*cmplx.Abs(want), "%g Hz: got %v, want %v", frequency, got, want)
			}
		})
	}
}

func TestNetworkAtRestStandsStill(t *testing.T) {
	f := divider(5)
	for name, c := range compensators() {
		t.Run(name, func(t *testing.T) {
			const vo, low = 3.0, 0.1
			var n Network
			n.Build(&c, &f, HeldLow, Limits{Low: low, High: 2})
			x := Rest(&c, &f, vo, low)
			u := [3]float64{vo, 0, 1}
			for i := range n.N {
				rate := 0.0
				for k := range n.N {
					rate += n.A[i][k] * x[k]
				}
				for k := range u {
					rate += n.B[i][k] * u[k]
				}
				require.InDelta(t, 0, rate, 1e-6, "state %d", i)
			}
			vc, push := 0.0, 0.0
			for k := range n.N {
				vc += n.C[k] * x[k]
				push += n.Push[k] * x[k]
			}
			for k := range u {
				vc += n.D[k] * u[k]
				push += n.PushD[k] * u[k]
			}
			require.InDelta(t, low, vc, 1e-12)
			require.Negative(t, push, "the output is far above its reference")
		})
	}
}

// A held amplifier lets go where the linear one would: at the limit both forms
// agree on the output and on the sign of its motion.
func TestHeldAndLinearFormsJoinAtTheLimit(t *testing.T) {
	f := divider(5)
	for name, c := range compensators() {
		t.Run(name, func(t *testing.T) {
			const high = 2.0
			var linear, held Network
			limits := Limits{Low: 0, High: high}
			linear.Build(&c, &f, Linear, limits)
			held.Build(&c, &f, HeldHigh, limits)
			u := [3]float64{5, 0.8, 1}
			x := [MaxCompensatorStates]float64{0.3, -0.9, 0.7, 1.1}
			// Shift the first state on which the output depends until it is at the limit.
			at := func(c []float64, d *[3]float64) (sum float64) {
				for k := range linear.N {
					sum += c[k] * x[k]
				}
				for k := range u {
					sum += d[k] * u[k]
				}
				return sum
			}
			for k := range linear.N {
				if linear.C[k] != 0 {
					x[k] += (high - at(linear.C[:], &linear.D)) / linear.C[k]
					break
				}
			}
			require.InDelta(t, high, at(linear.C[:], &linear.D), 1e-9)
			require.InDelta(t, high, at(held.C[:], &held.D), 1e-12)
			slope := 0.0
			for i := range linear.N {
				slope += linear.C[i] * at(linear.A[i][:], &linear.B[i])
			}
			push := at(held.Push[:], &held.PushD)
			if math.Abs(push) > 1e-9 && linear.D[0] == 0 && (limited(c.GainBandwidth) || c.Type >= parts.TransconductanceType2) {
				require.Equal(t, math.Signbit(slope), math.Signbit(push), "slope %g, push %g", slope, push)
			} else if !limited(c.GainBandwidth) && c.Type <= parts.OpAmpType3 {
				require.InDelta(t, 0, push, 1e-9, "an amplifier without a pole is in balance at the limit")
			}
		})
	}
}
