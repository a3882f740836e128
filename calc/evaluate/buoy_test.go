package evaluate_test

import (
	"os"
	"testing"

	"github.com/go-json-experiment/json"
	"github.com/stretchr/testify/require"

	"railproof/api/wire"
	"railproof/calc/evaluate"
	"railproof/calc/stage"
)

// example reads the stage and point of an example request.
func example(t testing.TB, rail string) (*stage.Stage, stage.Point) {
	t.Helper()
	raw, err := os.ReadFile("../../openapi/examples/" + rail + "/steady-state.json")
	require.NoError(t, err)
	var request struct {
		Stage *wire.Stage
		Point *wire.Point
	}
	require.NoError(t, json.Unmarshal(raw, &request, json.MatchCaseInsensitiveNames(true)))
	decoded, err := request.Stage.Decode("/stage")
	require.NoError(t, err)
	point, err := request.Point.Decode("/point", decoded.Stage)
	require.NoError(t, err)
	return decoded.Stage, point
}

func BenchmarkEval(b *testing.B) {
	s, p := example(b, "buoy-5v0")
	e := evaluate.Prepare(s)
	var r evaluate.Result
	b.ReportAllocs()
	for b.Loop() {
		e.Eval(&p, &r)
	}
}
