package exchange

import (
	"context"
	"encoding/json"
	"fmt"

	"railproof/service"
	"railproof/service/jobs"
	"railproof/service/results"
)

// Executor runs the requests of jobs.
type Executor struct{ x *Exchange }

// Executor returns the executor of the exchange's operations.
func (x *Exchange) Executor() Executor { return Executor{x} }

// Execute implements jobs.Executor.
func (e Executor) Execute(ctx context.Context, operation string, request []byte, m *service.Meter) jobs.Outcome {
	if !e.x.Computes(operation) {
		return outcome(nil, problemOf(fmt.Errorf("exchange: a job of an operation %q that does not exist", operation)))
	}
	answer, problem := e.x.Do(service.WithMeter(ctx, m), operation, request)
	return outcome(answer, problem)
}

// outcome turns an answer or a problem into what a job keeps.
func outcome(answer *Answer, problem *Problem) jobs.Outcome {
	var kept results.Answer
	if problem == nil {
		kept, problem = answer.Kept()
	}
	if problem == nil {
		return jobs.Outcome{ResultID: answer.ResultID, Answer: kept}
	}
	text, err := json.Marshal(problem)
	if err != nil {
		panic("exchange: a problem that cannot be encoded")
	}
	return jobs.Outcome{Problem: text, Busy: problem.Kind == Busy, Cause: problem.Cause}
}

// Kept returns the form of the answer in which it is kept: JSON where it has that.
func (a *Answer) Kept() (results.Answer, *Problem) {
	return results.Answer{Media: jsonForm, Body: a.Body}, nil
}
