package transient

import "railproof/calc/evaluate"

// Bind sets plant, bounds and saturation current of a setup to an evaluated stage.
// It reports whether the stage regulates there. Saturation is that of the data
// sheet at the stage's values; parts.Unknown where there is none.
func (s *Setup) Bind(e *evaluate.Evaluator, status evaluate.Status) bool {
	ok := s.Plant.Bind(e, status)
	stage := e.Stage()
	s.Bounds = DefaultBounds(&stage.Controller, &s.Plant)
	s.Saturation = stage.Inductor.Rating.Saturation
	return ok
}
