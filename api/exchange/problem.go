package exchange

import (
	"context"
	"errors"

	"railproof/api/wire"
	"railproof/openapi"
	"railproof/service"
)

// Problem is an RFC 9457 problem body. Every refusal and every failure becomes
// one here and nowhere else.
type Problem struct {
	Type     string       `json:"type"`
	Title    string       `json:"title"`
	Status   int          `json:"status"`
	Detail   string       `json:"detail,omitzero"`
	Instance string       `json:"instance,omitzero"`
	Errors   []wire.Fault `json:"errors,omitzero"`

	Kind       Kind  `json:"-"`
	RetryAfter int   `json:"-"` // [s] 0: do not say
	Cause      error `json:"-"` // for the log; never leaves
}

// Kind names a type of problem; each has a page under /docs/problems.
type Kind string

const (
	Malformed        Kind = "malformed"
	UnknownParameter Kind = "unknown-parameter"
	Unauthorized     Kind = "unauthorized"
	Forbidden        Kind = "forbidden"
	NotFound         Kind = "not-found"
	MethodNotAllowed Kind = "method-not-allowed"
	NotAcceptable    Kind = "not-acceptable"
	Conflict         Kind = "conflict"
	TooLarge         Kind = "too-large"
	UnsupportedMedia Kind = "unsupported-media-type"
	SchemaFault      Kind = "schema"
	PhysicsFault     Kind = "physics"
	TooMany          Kind = "too-many-requests"
	Internal         Kind = "internal"
	Busy             Kind = "busy"
	Deadline         Kind = "deadline"
)

// About describes a kind of problem for its page and its body.
type About struct {
	Kind    Kind
	Status  int
	Title   string
	Meaning string // for the page
}

// Kinds lists every kind of problem.
func Kinds() []About { return kinds }

var kinds = []About{
	{Malformed, 400, "The request cannot be read", "The body is not one JSON document: a syntax error, a name that stands twice in an object, text after the document, invalid UTF-8, a number beyond double precision, or more than 32 levels of nesting. errors tells where."},
	{UnknownParameter, 400, "A query or path parameter cannot be taken", "A parameter is unknown, given twice, or outside what the contract accepts. errors names it."},
	{Unauthorized, 401, "A key is needed", "No key was given, or one that is not known. Send it as Authorization: Bearer."},
	{Forbidden, 403, "The key does not allow this", "The key is known but lacks the scope: read, compute or admin."},
	{NotFound, 404, "There is no such thing", "Nothing stands at this path, or the job or result is unknown or no longer kept."},
	{MethodNotAllowed, 405, "The method is not allowed here", "The path exists with other methods; Allow lists them."},
	{NotAcceptable, 406, "None of the forms asked for can be given", "Accept names only forms that the operation does not have. The contract lists those it has."},
	{Conflict, 409, "The state does not allow this", "The job is in a state in which the request makes no sense, such as cancelling one that is done."},
	{TooLarge, 413, "The body is too large", "The body is larger than the limit that detail states."},
	{UnsupportedMedia, 415, "The body has a form that is not taken", "Bodies are application/json in UTF-8, without Content-Encoding."},
	{SchemaFault, 422, "The document breaks its schema", "The document is JSON but not as the contract wants it. errors lists every fault found, at most 50, each with a JSON Pointer, what was given and what is accepted."},
	{PhysicsFault, 422, "The document makes no physical sense", "The schema is kept, but values contradict one another or physics: a spread whose least value is above its typical one, a table that does not rise, an output above the input. errors lists every fault with its JSON Pointer."},
	{TooMany, 429, "Too many requests", "The rate limit of this key or address is used up. Retry-After tells when to try again."},
	{Internal, 500, "Something is wrong on our side", "The request was fine and we failed. instance names the request in our log; nothing else is told."},
	{Busy, 503, "Too busy right now", "Every slot for such work is taken and the queue is full. Retry-After tells when to try again; nothing was started."},
	{Deadline, 503, "The time for this request ran out", "The computation did not end within the time limit. Ask for less, or ask for a job."},
}

var aboutKind = func() map[Kind]*About {
	m := map[Kind]*About{}
	for i := range kinds {
		m[kinds[i].Kind] = &kinds[i]
	}
	return m
}()

// NewProblem returns a problem of the kind. Its type is a reference to its page,
// relative to the server.
func NewProblem(k Kind, detail string, faults ...wire.Fault) *Problem {
	about := aboutKind[k]
	return &Problem{Type: "/docs/problems/" + string(k), Title: about.Title, Status: about.Status, Detail: shorten(detail, 1000), Errors: clip(faults), Kind: k}
}

// clip bounds the list and the texts of faults to what the contract allows.
func clip(faults []wire.Fault) []wire.Fault {
	if len(faults) > wire.MaxFaults {
		faults = faults[:wire.MaxFaults]
	}
	for i := range faults {
		f := &faults[i]
		f.Pointer = bounded(f.Pointer)
		f.Detail, f.Limit, f.Received = shorten(f.Detail, 1000), shorten(f.Limit, 240), shorten(f.Received, 240)
	}
	return faults
}

func malformed(f wire.Fault) *Problem { return NewProblem(Malformed, f.Detail, f) }

// Schema turns the contract's faults into a problem of the kind.
func Schema(k Kind, faults []openapi.Fault) *Problem {
	list := make([]wire.Fault, len(faults))
	for i, f := range faults {
		list[i] = wire.Fault(f)
	}
	return NewProblem(k, first(list), list...)
}

// first says the first fault in a sentence, and how many there are.
func first(faults []wire.Fault) string {
	if len(faults) == 0 {
		return ""
	}
	f := faults[0]
	s := f.Detail
	if f.Pointer != "" {
		s = f.Pointer + ": " + s
	}
	if len(faults) > 1 {
		s += "; errors lists every fault"
	}
	return s
}

// problemOf turns what a use case or a decoder returned into a problem.
func problemOf(err error) *Problem {
	if invalid, ok := errors.AsType[*wire.InvalidError](err); ok {
		return NewProblem(PhysicsFault, first(invalid.Faults), invalid.Faults...)
	}
	switch {
	case errors.Is(err, service.ErrBusy):
		p := NewProblem(Busy, "every slot is taken and the queue is full")
		p.RetryAfter = 1
		return p
	case errors.Is(err, context.DeadlineExceeded), errors.Is(err, context.Canceled):
		p := NewProblem(Deadline, "the computation was stopped before it ended")
		p.RetryAfter = 5
		return p
	}
	p := NewProblem(Internal, "")
	p.Cause = err
	return p
}
