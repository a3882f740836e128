package service

import (
	"context"
	"math"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/calc/corners"
	"railproof/calc/evaluate"
	"railproof/calc/quantity"
	"railproof/calc/spread"
	"railproof/calc/stage"
	"railproof/calc/switched"
)

// plane is a model that is straight in its coordinates; beyond a corner it has no
// value although it works.
type plane struct {
	slope []float64
	blind bool
	fails bool // beyond the same corner it does not work
}

func (m *plane) Eval(z, out []float64) (evaluate.Status, switched.Mode) {
	v := 0.0
	for i := range z {
		v += m.slope[i] * z[i]
	}
	out[0] = v
	if m.blind && z[0] > 0.5 {
		out[0] = math.NaN()
	}
	if m.fails && z[0] > 0.5 {
		return evaluate.DropOut, switched.Continuous
	}
	return evaluate.OK, switched.Continuous
}

// planePass is a pass over a stage with three spreads and all conditions.
func planePass(t *testing.T) (*worstPass, *driver, *plane) {
	t.Helper()
	s := plain().Stage
	variables := make([]spread.Variable, 0, 3)
	for _, field := range []string{"inductor/inductance_h", "inductor/dc_resistance_ohm", "switching_frequency_hz"} {
		v := *s.Field(field)
		variables = append(variables, spread.Variable{Pointer: "/stage/" + field, Field: field, Min: 0.9 * v, Typ: v, Max: 1.1 * v})
	}
	c := stage.Conditions{Input: stage.Range{Min: 18, Typ: 24, Max: 32}, LoadCurrent: stage.Range{Min: 1, Typ: 3, Max: 6}, AmbientDegC: stage.Range{Min: 0, Typ: 25, Max: 60}, Control: stage.Control{Kind: stage.RegulateTo, Voltage: 5}}
	bound, err := corners.NewDesign(s, variables, &c, corners.DesignOptions{})
	require.NoError(t, err)
	bound.Problem().Targets = []corners.Target{{Direction: corners.Greatest}, {Direction: corners.Least}}
	p := &worstPass{kind: ofLoop, bound: bound, ids: make([]quantity.ID, 1), blind: make([]bool, 2), bears: make([]bool, len(bound.Problem().Coordinates))}
	m := &plane{slope: []float64{1, -2, 3, -4, 5, -6}}
	return p, &driver{ctx: context.Background(), models: []corners.Model{m}, meter: new(Meter)}, m
}

func TestVerticesOfAStraightModelAreExact(t *testing.T) {
	p, d, m := planePass(t)
	require.NoError(t, p.vertices(d, &worstRequest{}))
	sum := 0.0
	for _, s := range m.slope {
		sum += math.Abs(s)
	}
	require.InDelta(t, sum, p.found[0].Value, 1e-12)
	require.InDelta(t, -sum, p.found[1].Value, 1e-12)
	require.Equal(t, []bool{false, false}, p.blind)
}

func TestAWorkingPointWithoutAValueIsTold(t *testing.T) {
	p, d, m := planePass(t)
	m.blind = true
	require.NoError(t, p.vertices(d, &worstRequest{}))
	require.Equal(t, []bool{true, true}, p.blind, "an unstable corner hides no margin")
}

func TestVerticesTellOfCornersAtWhichTheStageDoesNotWork(t *testing.T) {
	p, d, m := planePass(t)
	m.fails = true
	require.NoError(t, p.vertices(d, &worstRequest{}))
	require.Len(t, p.failures, 1, "one point of the status is enough")
	require.Equal(t, evaluate.DropOut, p.failures[0].Status)
	require.Greater(t, p.failures[0].At[0], 0.5)
	require.Equal(t, []bool{false, false}, p.blind)
}

func TestVerticesGoOnFromALikeDesign(t *testing.T) {
	like, d, _ := planePass(t)
	require.NoError(t, like.vertices(d, &worstRequest{}))
	p, d, m := planePass(t)
	m.slope[0] = -m.slope[0] // what the other part has changed
	request := &worstRequest{like: &worstCase{passes: []*worstPass{like}}, role: "/stage/inductor"}
	require.NoError(t, p.vertices(d, request))
	require.InDelta(t, like.found[0].Value, p.found[0].Value, 1e-12)
}

func TestTranslatedPointsStayInTheirBox(t *testing.T) {
	p, _, _ := planePass(t)
	p.bound.Problem().Coordinates[0].High = 0
	z := p.translate([]float64{1, -1, 0.5, 1, 1, 1}, map[string]int{"/stage/inductor/inductance_h": 0, "/stage/inductor/dc_resistance_ohm": 1, "/conditions/input_v": 2})
	require.Equal(t, []float64{0, -1, 0, 0.5, 0, 0}, z)
}
