package corners

import (
	"railproof/calc/evaluate"
	"railproof/calc/switched"
)

// Nearby is a Model that can begin from what the typical design comes to. Near returns
// a Model for coordinates about a corner, biases and conditions as there: it belongs to
// the same worker, and its figures depend on corner and coordinates only. They agree
// with Eval's within the tolerances of an evaluation.
type Nearby interface {
	Model
	Near(corner []float64) Model
}

// modelsNear returns the models for units at each corner.
func modelsNear(m Model, corners [][]float64) []Model {
	models := make([]Model, len(corners))
	for c := range corners {
		models[c] = m
		if n, ok := m.(Nearby); ok {
			models[c] = n.Near(corners[c])
		}
	}
	return models
}

// Near implements Nearby.
func (m *stageModel) Near(corner []float64) Model {
	z := append([]float64(nil), corner...)
	clear(z[:m.design.set.Len()])
	m.place(z)
	anchor, ok := m.evaluator.AnchorAt(&m.point, &m.result)
	if !ok {
		return m
	}
	return &anchored{m, anchor}
}

// anchored evaluates from an anchor.
type anchored struct {
	*stageModel
	anchor evaluate.Anchor
}

// Eval implements Model.
func (m *anchored) Eval(z, out []float64) (evaluate.Status, switched.Mode) {
	m.place(z)
	m.evaluator.EvalNear(&m.anchor, &m.point, &m.result)
	return m.take(out)
}
