package evaluate

import "railproof/calc/switched"

// Waveform samples one period of the last evaluation's circuit at about points
// instants, corners included, input capacitors and their node with it. It
// allocates. It reports false if that evaluation has no solution.
func (e *Evaluator) Waveform(points int) (*switched.Waveform, bool) {
	banks := len(e.stage.InputCapacitors)
	return e.solver.WaveformWithInput(&e.circuit, &e.solution, points, banks, &e.inputBank)
}
