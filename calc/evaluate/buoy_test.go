package evaluate_test

import (
	"encoding/json"
	"math/rand/v2"
	"os"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/api/wire"
	"railproof/calc/evaluate"
	"railproof/calc/numeric"
	"railproof/calc/stage"
)

// example reads the stage and point of an example request.
func example(t testing.TB, rail string) (*stage.Stage, stage.Point) {
	t.Helper()
	raw, err := os.ReadFile("../../openapi/examples/" + rail + "/steady-state.json")
	require.NoError(t, err)
	var request wire.SteadyStateRequest
	var tree any
	require.NoError(t, json.Unmarshal(raw, &tree))
	require.NoError(t, wire.FromTree(tree, &request))
	decoded, err := request.Stage.Decode("/stage")
	require.NoError(t, err)
	point, err := request.Point.Decode("/point", decoded.Stage)
	require.NoError(t, err)
	return decoded.Stage, point
}

// banks gives a stage three output banks: its own ceramics, a polymer and an
// electrolytic capacitor.
func banks(s *stage.Stage) {
	ceramic := s.OutputCapacitors[0]
	for _, b := range []struct{ c, esr float64 }{{1.5e-4, 1.2e-2}, {4.7e-4, 6e-2}} {
		more := ceramic
		more.Count, more.Capacitance, more.ESR = 1, b.c, b.esr
		more.CapacitanceAtBias = numeric.Table{}
		s.OutputCapacitors = append(s.OutputCapacitors, more)
	}
}

// BenchmarkEval evaluates buoy-5v0 with tables, core loss, thermal coupling and
// all its spreads in place: steady state, every loss, equilibrium.
func BenchmarkEval(b *testing.B) {
	for _, bench := range []struct {
		name  string
		alter func(*stage.Stage, *stage.Point)
	}{
		{"ccm/one-bank", func(*stage.Stage, *stage.Point) {}},
		{"dcm/one-bank", func(s *stage.Stage, p *stage.Point) {
			s.Rectifier, p.Load.Current = stage.SynchronousEmulated, 0.3
		}},
		{"ccm/three-banks", func(s *stage.Stage, _ *stage.Point) { banks(s) }},
		{"ccm/three-banks-stiff", func(s *stage.Stage, _ *stage.Point) {
			banks(s)
			s.OutputCapacitors[0].ESR = 1e-5
		}},
	} {
		b.Run(bench.name, func(b *testing.B) {
			s, p := example(b, "buoy-5v0")
			bench.alter(s, &p)
			e := evaluate.Prepare(s)
			var r evaluate.Result
			e.Eval(&p, &r)
			if r.Status != evaluate.OK {
				b.Fatal(r.Status)
			}
			b.Run("cold", func(b *testing.B) {
				b.ReportAllocs()
				for b.Loop() {
					e.Eval(&p, &r)
				}
			})
			b.Run("near", func(b *testing.B) {
				anchor, ok := e.AnchorAt(&p, &r)
				require.True(b, ok)
				units := drawUnits(e.Stage())
				b.ReportAllocs()
				k := 0
				for b.Loop() {
					units[k%len(units)].build()
					k++
					e.EvalNear(&anchor, &p, &r)
				}
			})
		})
	}
}

// BenchmarkRails evaluates the typical point of every rail of the examples.
func BenchmarkRails(b *testing.B) {
	for _, rail := range []string{"buoy-5v0", "buoy-3v3", "mast-12v0"} {
		b.Run(rail, func(b *testing.B) {
			s, p := example(b, rail)
			e := evaluate.Prepare(s)
			var r evaluate.Result
			b.ReportAllocs()
			for b.Loop() {
				e.Eval(&p, &r)
			}
		})
	}
}

// unit is one built specimen of a stage: numbers of its own in the stage's fields.
type unit []struct {
	field *float64
	value float64
}

func (u unit) build() {
	for i := range u {
		*u[i].field = u[i].value
	}
}

// drawUnits draws specimens with 20 spreads, uniform within the tolerances of
// ordinary parts.
func drawUnits(s *stage.Stage) []unit {
	r := rand.New(rand.NewPCG(1, 1))
	c, in, hs, ls, l, k := &s.OutputCapacitors[0], &s.InputCapacitors[0], &s.HighSide, &s.LowSide, &s.Inductor, &s.Controller
	spreads := []struct {
		field *float64
		ratio float64
	}{
		{&l.Inductance, 0.2},
		{&l.DCResistance, 0.1},
		{&l.Core.K, 0.2},
		{&l.Thermal.JunctionToAmbient, 0.15},
		{&c.Capacitance, 0.2},
		{&c.ESR, 0.5},
		{&in.Capacitance, 0.2},
		{&in.ESR, 0.5},
		{&hs.OnResistance, 0.25},
		{&hs.GateSwitchCharge, 0.3},
		{&hs.OutputCharge, 0.2},
		{&hs.Thermal.JunctionToAmbient, 0.15},
		{&ls.OnResistance, 0.25},
		{&ls.RecoveryCharge, 0.4},
		{&ls.BodyDiode, 0.1},
		{&ls.Thermal.JunctionToAmbient, 0.15},
		{&k.GateOn, 0.3},
		{&k.DeadTime, 0.3},
		{&k.QuiescentCurrent, 0.3},
		{&s.SwitchingFrequency, 0.08},
	}
	units := make([]unit, 256)
	for i := range units {
		units[i] = make(unit, len(spreads))
		for j, f := range spreads {
			units[i][j].field, units[i][j].value = f.field, *f.field*(1+f.ratio*(2*r.Float64()-1))
		}
	}
	return units
}
