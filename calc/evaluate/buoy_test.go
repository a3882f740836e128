package evaluate_test

import (
	"encoding/json"
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
			b.ReportAllocs()
			for b.Loop() {
				e.Eval(&p, &r)
			}
		})
	}
}
