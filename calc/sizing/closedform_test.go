package sizing_test

import (
	"fmt"
	"math"
	"slices"
	"sync"
	"testing"

	"github.com/stretchr/testify/assert"
	"github.com/stretchr/testify/require"

	"railproof/calc/evaluate"
	"railproof/calc/internal/calctest"
	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/sizing"
	"railproof/calc/stage"
)

func TestESRInvertsTheRipple(t *testing.T) {
	const di, fs, c = 2.0, 5e5, 3e-5
	for _, d := range []float64{0.05, 0.2, 0.5, 0.7, 0.95} {
		for esr := 1e-5; esr < 1; esr *= 1.7 {
			dv := sizing.OutputRipple(di, d, fs, c, esr)
			calctest.Close(t, fmt.Sprintf("D %g, ESR %g", d, esr), sizing.ESRForRipple(di, d, fs, c, dv), esr, 1e-6)
		}
		assert.True(t, math.IsNaN(sizing.ESRForRipple(di, d, fs, c, di/(8*fs*c)*0.999)), "charge alone exceeds the limit")
	}
}

// The three branches meet: a step of the time constant across either boundary moves
// the ripple by no more than its own slope explains.
func TestRippleBranchesMeet(t *testing.T) {
	const di, fs, c = 1.0, 1e5, 1e-5
	for _, d := range []float64{0.1, 0.37, 0.5, 0.81} {
		low := math.Min(d, 1-d)
		for _, x := range []float64{low / 2, (1 - low) / 2} {
			esr := x / (c * fs)
			a, b := sizing.OutputRipple(di, d, fs, c, esr*(1-1e-9)), sizing.OutputRipple(di, d, fs, c, esr*(1+1e-9))
			assert.InDelta(t, 1, b/a, 1e-8, "D %g, x %g", d, x)
		}
	}
}

// Sampled waveforms of the summed currents of N phases, against the closed forms.
func TestInterleavedForms(t *testing.T) {
	const samples = 60000
	for _, n := range []int{1, 2, 3, 6} {
		for _, d := range []float64{0.07, 0.23, 0.5, 0.613, 0.9} {
			const i, di, fs, tau, vin = 4.0, 3.0, 2e5, 1.3e-7, 1.0
			what := fmt.Sprintf("N %d, D %g", n, d)
			switched := func(at float64) float64 { // one phase, at in periods
				at -= math.Floor(at)
				if at >= d {
					return 0
				}
				return i - di/2 + di*at/d
			}
			inductor := func(at float64) float64 {
				at -= math.Floor(at)
				if at < d {
					return -0.5 + at/d
				}
				return 0.5 - (at-d)/(1-d)
			}
			var sum, square, charge float64
			low, high, lowI, highI := math.Inf(1), math.Inf(-1), math.Inf(1), math.Inf(-1)
			mean := float64(n) * d * i
			for k := range samples {
				at := (float64(k) + 0.5) / samples
				x, y := 0.0, 0.0
				for p := range n {
					x += switched(at + float64(p)/float64(n))
					y += inductor(at + float64(p)/float64(n))
				}
				sum += x / samples
				square += (x - mean) * (x - mean) / samples
				charge += (mean - x) / (samples * fs)
				v := charge + tau*(mean-x)
				low, high, lowI, highI = math.Min(low, v), math.Max(high, v), math.Min(lowI, y), math.Max(highI, y)
			}
			c := sizing.NewInputCurrent(n, i, di, d)
			calctest.Close(t, what+" mean", c.Mean, sum, 1e-3)
			calctest.Close(t, what+" RMS", c.RMS(), math.Sqrt(square), 1e-3)
			calctest.Close(t, what+" charge", c.RippleCharge(n, fs, tau), high-low, 2e-3)
			// Ripple of one phase is 1 here: D (1 − D) Vin/(L fs) = 1.
			ripple := sizing.InterleavedRipple(n, d) / (d * (1 - d))
			assert.InDelta(t, highI-lowI, ripple, 2e-3, what+" summed ripple")
			flat := sizing.NewInputCurrent(n, i, 0, d)
			m := math.Floor(float64(n) * d)
			calctest.Close(t, what+" RMS without ripple", flat.RMS(), float64(n)*i*math.Sqrt((d-m/float64(n))*((m+1)/float64(n)-d)), 1e-9)
		}
	}
	// One phase without ripple: both extremes on the edges.
	c := sizing.NewInputCurrent(1, 3.5, 0, 0.4)
	calctest.Close(t, "flat top", c.RippleCharge(1, 1e6, 3e-8), 3.5*0.4*0.6/1e6+3e-8*3.5, 1e-12)
}

func TestDiscontinuousOnTime(t *testing.T) {
	// Case ps-sz-17's stage: K = 0.2 gives M = 0.5798 at D = 0.4.
	const vin, l, fs, r = 24.0, 2e-4, 1e4, 20.0
	m := 2 / (1 + math.Sqrt(1+4*(2*l*fs/r)/(0.4*0.4)))
	calctest.Close(t, "on-time", sizing.DiscontinuousOnTime(vin, m*vin, m*vin/r, l, fs, 0), 0.4/fs, 1e-12)
}

// integrate runs the inductor current of a stage at full or no duty against a load
// current and returns the greatest deviation of the output.
func integrate(vin, vout, l, c, from, to float64) float64 {
	const steps = 400000
	end := 4 * math.Abs(to-from) * l / math.Min(math.Max(vin-vout, 1e-9), vout)
	dt := end / steps
	i, v, worst := from, vout, 0.0
	for range steps {
		drive := vin
		if to < from {
			drive = 0
		}
		i += (drive - v) / l * dt
		v += (i - to) / c * dt
		worst = math.Max(worst, math.Abs(v-vout))
		if (to > from) == (i > to) {
			break
		}
	}
	return worst
}

func TestApplicationByIntegration(t *testing.T) {
	const vin, vout, l, step, dv = 12.0, 5.0, 4e-6, 3.0, 0.02
	c := sizing.CapacitanceForApplication(vin, vout, l, step, dv, 1)
	// The form takes the output as constant; the deviation of 20 mV bends it by as much of 7 V.
	calctest.Close(t, "undershoot", integrate(vin, vout, l, c, 1, 1+step), dv, 5e-3)
}

func TestReleaseByIntegration(t *testing.T) {
	const vin, vout, l, step, dv = 12.0, 3.3, 4e-6, 3.0, 0.3
	c := sizing.CapacitanceForRelease(l, step, vout, dv)
	calctest.Close(t, "overshoot", integrate(vin, vout, l, c, 1+step, 1), dv, 1e-3)
}

func TestHoldUpByIntegration(t *testing.T) {
	const vo, to, io, hold = 5.0, 4.2, 3.0, 1e-3
	c := sizing.CapacitanceForHoldUp(vo, to, io, hold)
	v := vo
	const steps = 1000
	for range steps {
		v -= io / c * hold / steps
	}
	calctest.Close(t, "voltage after hold-up", v, to, 1e-12)
}

// The closed form of the fastest recovery, which bounds the inductance, against a
// search over when to stop rising.
func TestTimeOptimalRecovery(t *testing.T) {
	for _, c := range []struct{ on, off float64 }{{7, 5}, {20, 1.2}, {2, 10}} {
		const l, step = 3e-6, 4.0
		for _, rise := range []bool{true, false} {
			up, down := c.on/l, c.off/l
			if !rise {
				up, down = down, up
			}
			calctest.Close(t, fmt.Sprintf("%v rise %v", c, rise), sizing.RecoverySlowness(c.on, c.off, rise)*l*step, fastestRecovery(step, up, down), 1e-9)
		}
	}
}

// generated is how many of the requirements are looked at.
func generated() int {
	if testing.Short() {
		return 40
	}
	return requirements
}

// sized are the answers to the generated requirements, computed once for all tests.
var sized = sync.OnceValue(func() []sizing.Answer {
	answers := make([]sizing.Answer, generated())
	for k := range answers {
		req := generate(k)
		answers[k] = sizing.SizeAt(req, sizing.NewChoices(), req.SwitchingFrequency.Min)
		answers[k].Notes = slices.Clip(answers[k].Notes)
	}
	return answers
})

// drafts visits copies of the first n answers that hold a draft stage.
func drafts(t *testing.T, n int, visit func(k int, a *sizing.Answer)) {
	t.Helper()
	for k := range min(n, generated()) {
		if a := sized()[k]; a.Status.OK() {
			visit(k, &a)
		}
	}
}

// What the windows' margin covers: closed forms against the exact engine, with the
// engine's own duty ratio, inductance and capacitance.
func TestClosedFormsAgainstTheEngine(t *testing.T) {
	t.Parallel()
	worst := map[string]float64{}
	see := func(what string, got, want float64) { worst[what] = math.Max(worst[what], math.Abs(got/want-1)) }
	drafts(t, 120, func(k int, a *sizing.Answer) {
		e := evaluate.Prepare(a.Stage)
		s := e.Stage()
		var r evaluate.Result
		p := a.Point
		for _, p.Input = range []float64{a.Conditions.Input.Min, a.Conditions.Input.Max} {
			p.Load.Current = a.Conditions.LoadCurrent.Max
			e.Eval(&p, &r)
			require.True(t, r.Status.Figures())
			q, leg := &r.Quantities, e.Circuit().Leg
			n := s.PhaseCount
			drops := sizing.Drops{HighSide: leg.HighSide, Rectifier: leg.Rectifier.Slope, Threshold: leg.Rectifier.Threshold, Winding: leg.Winding}
			i := q[quantity.InductorMean]
			d := sizing.DropDuty(q[quantity.BridgeVoltage], q[quantity.OutputMean], i, drops)
			see("duty ratio", d, q[quantity.DutyRatio])
			if q[quantity.InductorValley] <= 0 && s.Rectifier != stage.Synchronous {
				continue
			}
			off := q[quantity.OutputMean] + drops.Threshold + i*(drops.Rectifier+drops.Winding)
			ripple := off * (1 - d) / (q[quantity.InductanceEffective] * s.SwitchingFrequency)
			see("inductor ripple", ripple, q[quantity.InductorRipplePP])
			see("inductor RMS", sizing.TriangleRMS(i, ripple), q[quantity.InductorRMS])
			see("high-side RMS", sizing.TrapezoidRMS(i-ripple/2, i+ripple/2, d), q[quantity.HighSideRMS])
			c := sizing.NewInputCurrent(n, i, ripple, d)
			esr, _ := s.InputCapacitors[0].ESRAt(r.PartDegC[12], p.AgeRatio)
			capacitance := q[quantity.InputCapacitanceEffective]
			// Beside a null of interleaved phases a relative error has no meaning.
			if c.RMS() > 0.02*i {
				see("input RMS", c.RMS(), q[quantity.InputCapacitorRMS])
				see("input ripple", c.RippleCharge(n, s.SwitchingFrequency, esr*capacitance)/capacitance, q[quantity.InputRipplePP])
			}
			if len(s.OutputCapacitors) == 1 && n == 1 {
				bank := e.Circuit().Bank[0]
				see("output ripple", sizing.OutputRipple(ripple, d, s.SwitchingFrequency, bank.C, bank.ESR), q[quantity.OutputRipplePP])
			}
		}
	})
	t.Logf("greatest deviations: %v", worst)
	for what, w := range worst {
		assert.Less(t, w, sizing.ModelMargin-1, what)
	}
	assert.Len(t, worst, 7)
}

// In discontinuous conduction, the least on-time in closed form against the engine.
func TestLeastRegularLoadAgainstTheEngine(t *testing.T) {
	t.Parallel()
	seen := 0
	drafts(t, 120, func(k int, a *sizing.Answer) {
		if a.Stage.Rectifier == stage.Synchronous {
			return
		}
		e := evaluate.Prepare(a.Stage)
		var r evaluate.Result
		p := a.Point
		p.Input, p.PartTemperatureDegC = a.Conditions.Input.Max, parts.ReferenceDegC
		for _, share := range []float64{0.02, 0.05} {
			p.Load.Current = a.Conditions.LoadCurrent.Max * share
			e.Eval(&p, &r)
			q, leg := &r.Quantities, e.Circuit().Leg
			if r.Status != evaluate.OK || p.Load.Current > 0.5*q[quantity.BoundaryLoad] {
				continue
			}
			on := sizing.DiscontinuousOnTime(q[quantity.BridgeVoltage], q[quantity.OutputMean], q[quantity.InductorMean], q[quantity.InductanceEffective], a.Stage.SwitchingFrequency, leg.Rectifier.Threshold)
			calctest.Close(t, fmt.Sprintf("%d on-time", k), on, q[quantity.DutyRatio]/a.Stage.SwitchingFrequency, 0.03)
			seen++
		}
	})
	assert.Greater(t, seen, 2)
}
