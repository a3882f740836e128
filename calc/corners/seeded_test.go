package corners

import (
	"math"
	"math/rand/v2"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/calc/evaluate"
	"railproof/calc/switched"
)

// bowl is a smooth model with a worst point that a shift moves.
type bowl struct{ slope, shift []float64 }

func (m *bowl) Eval(z, out []float64) (evaluate.Status, switched.Mode) {
	v := 0.0
	for i := range z {
		v += m.slope[i]*z[i] + 0.2*math.Sin(z[i]+m.shift[i])
	}
	out[0] = v
	return evaluate.OK, switched.Continuous
}

// A search that goes on from a like problem's worst points is never better than
// these points, nor than the typical one, and finds the vertex of a nearly straight
// model wherever the seeds are.
func TestSeededSearch(t *testing.T) {
	random := rand.New(rand.NewPCG(3, 3))
	for range 50 {
		const n = 14
		m := &bowl{make([]float64, n), make([]float64, n)}
		p := &Problem{Quantities: 1, Targets: []Target{{Direction: Greatest}, {Direction: Least}}}
		seed := make([]float64, n)
		for i := range n {
			kind := Random
			if i < 3 {
				kind = Condition
			}
			p.Coordinates = append(p.Coordinates, Coordinate{Kind: kind, Low: -1, High: 1})
			m.slope[i], m.shift[i] = random.NormFloat64(), random.Float64()
			if math.Abs(m.slope[i]) < 0.3 {
				m.slope[i] = math.Copysign(0.3, m.slope[i])
			}
			seed[i] = 2*random.Float64() - 1
		}
		s := NewSeeded(p, [][]float64{seed})
		Run(s, m)
		out := make([]float64, 1)
		vertex := make([]float64, n)
		for t2, x := range s.Extremes() {
			for i := range vertex {
				vertex[i] = math.Copysign(1, m.slope[i])
				if t2 == 1 {
					vertex[i] = -vertex[i]
				}
			}
			m.Eval(vertex, out)
			require.InDelta(t, out[0], x.Value, 1e-12)
		}
		m.Eval(seed, out)
		require.GreaterOrEqual(t, s.Extremes()[0].Value, out[0])
		require.LessOrEqual(t, s.Extremes()[1].Value, out[0])
		require.Less(t, s.Evaluations(), scatterEvenly)
		nominal, status := s.Nominal()
		require.Equal(t, evaluate.OK, status)
		require.Len(t, nominal, 1)
	}
}
