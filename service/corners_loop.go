package service

import (
	"railproof/calc/corners"
	"railproof/calc/evaluate"
	"railproof/calc/loop"
	"railproof/calc/quantity"
	"railproof/calc/stage"
)

// loopExtension returns what computes loop quantities per point, nil where none is
// among the results. A point whose loop cannot be analysed leaves them without a
// value.
func loopExtension(results []quantity.ID) func() corners.Extension {
	for _, id := range results {
		if info, _ := quantity.Of(id); info.Group == quantity.Loop {
			return func() corners.Extension {
				analyser := new(loop.Analyser)
				return func(e *evaluate.Evaluator, _ *stage.Point, r *evaluate.Result) {
					_, _ = analyser.Fill(e, r.Status, &r.Quantities) // no value says it
				}
			}
		}
	}
	return nil
}
