package exchange

import (
	"context"
	"fmt"
	"time"

	"railproof/api/render"
	"railproof/api/wire"
	"railproof/openapi"
	"railproof/service"
)

// Exchange answers operations. It is safe for concurrent use.
type Exchange struct {
	contract *openapi.Contract
	service  *service.Service
}

// New returns an exchange over the contract and the use cases.
func New(contract *openapi.Contract, s *service.Service) *Exchange {
	return &Exchange{contract: contract, service: s}
}

// Answer is a computed answer, checked against the contract.
type Answer struct {
	Operation string
	Value     any      // the wire value that Body encodes
	Body      []byte   // in the own form of the operation: JSON on one line, or a page
	ResultID  string   // empty for dictionaries
	Timings   []Timing // outside the result
	view      View
}

// Timing is the time one step took.
type Timing struct {
	Step string
	Took time.Duration
}

// handler decodes a request, calls one use case and encodes its answer.
type handler func(ctx context.Context, x *Exchange, tree any, head wire.Head) (any, error)

// Computes reports whether the exchange has the operation and it takes a body.
func (x *Exchange) Computes(operation string) bool { return computations[operation] != nil }

// Request is a request that was read and that the contract accepts.
type Request struct {
	Operation string
	ResultID  string // names the answer
	Explain   bool   // tell how the figures follow, beside the answer
	view      View
	tree      any
	watch     stopwatch
}

// Canonical returns the RFC 8785 form of the request.
func (r *Request) Canonical() []byte { return service.AppendCanonical(nil, r.tree) }

// Read reads the body of an operation that takes one.
func (x *Exchange) Read(operation string, body []byte) (*Request, *Problem) {
	if !x.Computes(operation) {
		panic("exchange: no operation " + operation)
	}
	r := &Request{Operation: operation, watch: stopwatch{last: time.Now()}}
	tree, problem := parse(body)
	if problem != nil {
		return nil, problem
	}
	r.watch.lap("parse")
	if faults := x.contract.ValidateRequest(operation, tree); faults != nil {
		return nil, Schema(SchemaFault, faults)
	}
	r.watch.lap("check-request")
	r.tree, r.ResultID = tree, service.ResultID(operation, x.service.Engine(), tree)
	r.watch.lap("digest")
	return r, nil
}

// head is what every answer begins with.
func (x *Exchange) head(r *Request) wire.Head {
	return wire.Head{Engine: wire.EncodeEngine(x.service.Engine()), ResultID: r.ResultID}
}

// Answer computes the answer to a request.
func (x *Exchange) Answer(ctx context.Context, r *Request) (*Answer, *Problem) {
	value, err := computations[r.Operation](ctx, x, r.tree, x.head(r))
	if err != nil {
		return nil, problemOf(err)
	}
	if e, can := value.(wire.Explainer); can && r.Explain {
		e.Explain()
	}
	r.watch.lap("compute")
	a, problem := x.finish(r.Operation, value, &r.watch)
	if problem != nil {
		return nil, problem
	}
	a.ResultID, a.view = r.ResultID, r.view
	return a, nil
}

// Do answers an operation that takes a body.
func (x *Exchange) Do(ctx context.Context, operation string, body []byte) (*Answer, *Problem) {
	r, problem := x.Read(operation, body)
	if problem != nil {
		return nil, problem
	}
	return x.Answer(ctx, r)
}

const usualAnswer = 16 << 10 // [bytes] room for the text of an answer at one point

// finish checks an answer against the contract and encodes it.
func (x *Exchange) finish(operation string, value any, watch *stopwatch) (*Answer, *Problem) {
	if faults := x.contract.ValidateResponse(operation, 200, value); faults != nil {
		return nil, problemOf(fmt.Errorf("exchange: answer of %s breaks the contract: %+v", operation, faults))
	}
	watch.lap("check-answer")
	if report, is := value.(*render.Report); is {
		body := report.HTML()
		watch.lap("encode")
		return &Answer{Operation: operation, Value: value, Body: body, Timings: watch.laps}, nil
	}
	body, err := wire.AppendJSON(make([]byte, 0, usualAnswer), value)
	if err != nil {
		return nil, problemOf(fmt.Errorf("exchange: answer of %s cannot be encoded: %w", operation, err))
	}
	watch.lap("encode")
	return &Answer{Operation: operation, Value: value, Body: append(body, '\n'), Timings: watch.laps}, nil
}

// decode reads a request that the contract has accepted.
func decode[R any](tree any) (*R, error) {
	r := new(R)
	if err := wire.FromTree(tree, r); err != nil {
		return nil, fmt.Errorf("exchange: a request that the contract accepts and the wire types do not: %w", err)
	}
	return r, nil
}

type stopwatch struct {
	last time.Time
	laps []Timing
}

func (s *stopwatch) lap(step string) {
	now := time.Now()
	s.laps = append(s.laps, Timing{step, now.Sub(s.last)})
	s.last = now
}
