package evaluate_test

import (
	"math"
	"testing"

	"github.com/stretchr/testify/assert"
	"github.com/stretchr/testify/require"

	"railproof/calc/evaluate"
	"railproof/calc/internal/calctest"
	"railproof/calc/losses"
	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/stage"
)

var rails = []string{"buoy-5v0", "buoy-3v3", "mast-12v0"}

// sweep calls f for each rail over input, load, ambient, age and temperature mode.
func sweep(t *testing.T, f func(t *testing.T, name string, e *evaluate.Evaluator, p stage.Point, r *evaluate.Result)) {
	t.Helper()
	var r evaluate.Result
	for _, rail := range rails {
		s, p := example(t, rail)
		e := evaluate.Prepare(s)
		full := p.Load.Current
		for _, input := range []float64{18, 24, 32} {
			for _, load := range []float64{0, 0.02, 0.1, 0.5, 1} {
				for _, ambient := range []float64{-20, 25, 60} {
					for _, held := range []float64{parts.Unknown, 25} {
						q := p
						q.Input, q.Load.Current, q.AmbientDegC = input, load*full, ambient
						q.PartTemperatureDegC, q.AgeRatio = held, load
						calctest.Poison(&r)
						e.Eval(&q, &r)
						f(t, rail, e, q, &r)
					}
				}
			}
		}
	}
}

func TestLossesAreInputMinusOutput(t *testing.T) {
	sweep(t, func(t *testing.T, name string, _ *evaluate.Evaluator, p stage.Point, r *evaluate.Result) {
		if !r.Status.Figures() {
			return
		}
		q := &r.Quantities
		in, out, lost := q[quantity.InputPower], q[quantity.OutputPower], q[quantity.LossTotal]
		assert.InDelta(t, 0, (in-out-lost)/math.Max(in, 1e-3), 1e-9, "%s at %+v", name, p)
		assert.LessOrEqual(t, q[quantity.EnergyBalance], 1e-9)
		byPart := 0.0
		for _, i := range r.Losses.Items[:r.Losses.N] {
			assert.GreaterOrEqual(t, i.Power, 0.0, "%s %v %v", name, i.Part, i.Mechanism)
			byPart += i.Power * float64(i.Count)
		}
		assert.InDelta(t, lost, byPart, 1e-12*lost)
		assert.InDelta(t, in, p.Input*q[quantity.InputMean], 1e-12*in)
	})
}

func TestEachItemStandsOnce(t *testing.T) {
	sweep(t, func(t *testing.T, name string, _ *evaluate.Evaluator, _ stage.Point, r *evaluate.Result) {
		type key struct {
			p losses.Part
			m losses.Mechanism
		}
		seen := map[key]bool{}
		for _, i := range r.Losses.Items[:r.Losses.N] {
			assert.False(t, seen[key{i.Part, i.Mechanism}], "%s: %v %v twice", name, i.Part, i.Mechanism)
			seen[key{i.Part, i.Mechanism}] = true
		}
	})
}

// At a held temperature the circuit's own items can be checked by hand from the
// branch currents and the data-sheet resistances.
func TestHeldTemperatureUsesDataSheetResistances(t *testing.T) {
	s, p := example(t, "buoy-5v0")
	p.PartTemperatureDegC = 25
	e := evaluate.Prepare(s)
	var r evaluate.Result
	e.Eval(&p, &r)
	require.Equal(t, evaluate.OK, r.Status)
	q := &r.Quantities
	rms := q[quantity.HighSideRMS]
	assert.InEpsilon(t, s.HighSide.OnResistance*rms*rms, item(&r, losses.HighSide, losses.Conduction), 1e-12)
	mean := q[quantity.InductorMean]
	assert.InEpsilon(t, s.Inductor.DCResistance*mean*mean, item(&r, losses.Inductor, losses.WindingDC), 1e-12)
	square := q[quantity.InductorRMS]*q[quantity.InductorRMS] - mean*mean
	assert.InEpsilon(t, s.Inductor.ACResistanceRatio*s.Inductor.DCResistance*square, item(&r, losses.Inductor, losses.WindingAC), 1e-9)
	assert.Equal(t, 25.0, r.PartDegC[losses.Inductor])
	assert.True(t, math.IsNaN(q[quantity.ThermalFeedback]))
	// Bridge: the source and input path carry the mean input current.
	path := p.SourceResistance + s.Board.InputPath
	assert.InEpsilon(t, p.Input-path*q[quantity.InputMean], q[quantity.BridgeVoltage], 1e-9)
	// The load sees the output path.
	assert.InEpsilon(t, q[quantity.OutputMean]-s.Board.OutputPath*p.Load.Current, q[quantity.LoadVoltage], 1e-12)
}

func item(r *evaluate.Result, p losses.Part, m losses.Mechanism) float64 {
	for _, i := range r.Losses.Items[:r.Losses.N] {
		if i.Part == p && i.Mechanism == m {
			return i.Power
		}
	}
	return math.NaN()
}

func TestAnswerDependsOnStageAndPointOnly(t *testing.T) {
	s, p := example(t, "buoy-5v0")
	cold := evaluate.Prepare(s)
	used := evaluate.Prepare(s)
	var want, other, got evaluate.Result
	cold.Eval(&p, &want)
	q := p
	q.Input, q.Load.Current, q.AmbientDegC = 32, 0.2, 85
	used.Eval(&q, &other)
	used.Eval(&p, &got)
	assert.Equal(t, bits(&want), bits(&got))
}

func bits(r *evaluate.Result) (b [quantity.Count]uint64) {
	for i, v := range r.Quantities {
		b[i] = math.Float64bits(v)
	}
	return b
}

func TestEvalDoesNotAllocate(t *testing.T) {
	for _, rail := range rails {
		s, p := example(t, rail)
		e := evaluate.Prepare(s)
		var r evaluate.Result
		assert.Zero(t, testing.AllocsPerRun(50, func() { e.Eval(&p, &r) }), rail)
	}
}

func TestFeedbackSetsTheOutput(t *testing.T) {
	s, p := example(t, "buoy-5v0")
	p.Control = stage.Control{Kind: stage.ByFeedback}
	e := evaluate.Prepare(s)
	var r evaluate.Result
	e.Eval(&p, &r)
	want := s.Feedback.Reference * (1 + s.Feedback.Upper/s.Feedback.Lower)
	assert.InEpsilon(t, want, r.Quantities[quantity.OutputMean], 1e-10)
	// A drifted reference shows as an output error against the typical values.
	*e.Stage().Field("feedback/reference_v") *= 1.01
	e.Eval(&p, &r)
	path := s.Board.OutputPath * p.Load.Current
	assert.InDelta(t, 0.01-path/want, r.Quantities[quantity.OutputError], 2e-4)
}

func TestFixedDutyDeliversWhatTheRegulatedPointAsksFor(t *testing.T) {
	for _, rail := range rails {
		s, p := example(t, rail)
		e := evaluate.Prepare(s)
		var regulated, fixed evaluate.Result
		e.Eval(&p, &regulated)
		p.Control = stage.Control{Kind: stage.FixedDuty, Duty: regulated.Quantities[quantity.DutyRatio]}
		e.Eval(&p, &fixed)
		for _, id := range []quantity.ID{quantity.OutputMean, quantity.OutputRipplePP, quantity.InductorPeak, quantity.Efficiency} {
			assert.InEpsilon(t, regulated.Quantities[id], fixed.Quantities[id], 1e-6, "%s %s", rail, id.Key())
		}
	}
}
