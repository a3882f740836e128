package exchange

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"runtime/debug"

	"railproof/api/wire"
	"railproof/service"
	"railproof/service/jobs"
	"railproof/service/results"
)

// Executor runs the requests of jobs.
type Executor struct{ x *Exchange }

// Executor returns the executor of the exchange's operations.
func (x *Exchange) Executor() Executor { return Executor{x} }

// panicked is a panic where nobody above would answer it.
func panicked(r any) error { return fmt.Errorf("exchange: panic: %v\n%s", r, debug.Stack()) }

// Execute implements jobs.Executor. A panic ends the job, not the process.
func (e Executor) Execute(ctx context.Context, operation string, request []byte, m *service.Meter) (o jobs.Outcome) {
	defer func() {
		if r := recover(); r != nil {
			o = outcome(nil, problemOf(panicked(r)))
		}
	}()
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

// Kept returns the answer in its own form, in which it is kept.
func (a *Answer) Kept() (results.Answer, *Problem) {
	return results.Answer{Operation: a.Operation, Media: ownForm(a.Operation), Body: a.Body}, nil
}

// splittable is the operation of which large requests are worth splitting.
const splittable = "corners"

// plan reads the request of an analysis.
func (e Executor) plan(operation string, request []byte) (*wire.CornersRequest, *service.CornersPlan, *Request, error) {
	r, problem := e.x.Read(operation, request)
	if problem != nil {
		return nil, nil, nil, fmt.Errorf("exchange: a job's request is refused: %s", problem.Detail)
	}
	w, err := decode[wire.CornersRequest](r.tree)
	if err != nil {
		return nil, nil, nil, err
	}
	p, err := w.Decode()
	return w, p, r, err
}

// Parts implements jobs.Splitter.
func (e Executor) Parts(operation string, request []byte) (parts, evaluations int) {
	if operation != splittable {
		return 1, 0
	}
	_, p, _, err := e.plan(operation, request)
	if err != nil {
		return 1, 0 // Execute says what is wrong
	}
	return p.Parts()
}

// Part implements jobs.Splitter.
func (e Executor) Part(ctx context.Context, operation string, request []byte, part, parts int, m *service.Meter) (counts []byte, err error) {
	defer func() {
		if r := recover(); r != nil {
			err = panicked(r)
		}
	}()
	_, p, _, err := e.plan(operation, request)
	if err != nil {
		return nil, err
	}
	for {
		counts, err = e.x.service.CornersPart(service.WithMeter(ctx, m), p, part, parts)
		if !errors.Is(err, service.ErrBusy) {
			return counts, err
		}
	}
}

// Merge implements jobs.Splitter.
func (e Executor) Merge(ctx context.Context, operation string, request []byte, parts [][]byte) (o jobs.Outcome) {
	defer func() {
		if r := recover(); r != nil {
			o = outcome(nil, problemOf(panicked(r)))
		}
	}()
	w, p, r, err := e.plan(operation, request)
	if err != nil {
		return outcome(nil, problemOf(err))
	}
	a, err := e.x.service.CornersJoined(ctx, p, parts)
	if err != nil {
		return outcome(nil, problemOf(err))
	}
	answer, problem := e.x.finish(operation, wire.EncodeCorners(w, a, e.x.head(r)), new(stopwatch))
	if problem == nil {
		answer.ResultID = r.ResultID
	}
	return outcome(answer, problem)
}
