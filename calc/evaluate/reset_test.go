package evaluate_test

import (
	"testing"

	"github.com/stretchr/testify/assert"

	"railproof/calc/evaluate"
)

// An evaluator that has worked on other stages answers as a fresh one.
func TestResetForgetsTheStageBefore(t *testing.T) {
	used := new(evaluate.Evaluator)
	for round := range 2 {
		for _, rail := range rails {
			s, p := example(t, rail)
			fresh := evaluate.Prepare(s)
			if round == 0 && rail == rails[0] {
				used = evaluate.Prepare(s)
			}
			var want, got evaluate.Result
			fresh.Eval(&p, &want)
			used.Reset(s)
			used.Eval(&p, &got)
			assert.Equal(t, bits(&want), bits(&got), rail)
			assert.Equal(t, want.Losses, got.Losses, rail)
		}
	}
}
