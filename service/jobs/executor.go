package jobs

import (
	"context"

	"railproof/service"
	"railproof/service/results"
)

// Outcome is how an execution ended: a result, a problem, or neither where the same
// request has to be tried again.
type Outcome struct {
	ResultID string
	Answer   results.Answer
	Problem  []byte // JSON, for the caller
	Cause    error  // of a fault of ours, for the log
	Busy     bool   // no slot was free; nothing was started
}

// Executor does the work.
type Executor interface {
	// Execute runs a request to its end or to the context's.
	Execute(ctx context.Context, operation string, request []byte, m *service.Meter) Outcome
}

// Splitter is an Executor that can split large requests, so that several processes
// work on one job.
type Splitter interface {
	// Parts returns into how many parts a request can be split, and the evaluations
	// of them all; below 2 it is not split.
	Parts(operation string, request []byte) (parts, evaluations int)
	// Part runs one part and returns what Merge wants of it.
	Part(ctx context.Context, operation string, request []byte, part, parts int, m *service.Meter) ([]byte, error)
	// Merge makes the answer of all parts, the same bytes that Execute gives.
	Merge(ctx context.Context, operation string, request []byte, parts [][]byte) Outcome
}
