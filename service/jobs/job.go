package jobs

import (
	"errors"
	"time"
)

// State is where a job stands.
type State string

const (
	Waiting   State = "waiting"
	Running   State = "running"
	Done      State = "done"
	Failed    State = "failed"
	Cancelled State = "cancelled"
)

// Ended reports whether the state is final.
func (s State) Ended() bool { return s == Done || s == Failed || s == Cancelled }

// Request is work to keep.
type Request struct {
	Operation string
	ResultID  string // names the answer: the same for the same request
	Body      []byte
}

// Job is what is known of a job.
type Job struct {
	ID        string
	Operation string
	ResultID  string
	State     State
	Sequence  int64 // grows with every change
	Done      int64 // evaluations
	Expected  int64 // evaluations in all; 0 while not known
	Problem   []byte
	Created   time.Time
	Ended     time.Time     // zero while not ended
	Ran       time.Duration // since it was first taken; 0 while waiting
}

// Fraction returns the share of the work that is done, 0 where that is not known.
func (j *Job) Fraction() float64 {
	switch {
	case j.State == Done:
		return 1
	case j.Expected <= 0:
		return 0
	}
	return min(1, float64(j.Done)/float64(j.Expected))
}

// Rate returns the evaluations per second since the job was taken, 0 where that is
// not known.
func (j *Job) Rate() float64 {
	if j.Ran <= 0 {
		return 0
	}
	return float64(j.Done) / j.Ran.Seconds()
}

// Remaining estimates the time to the end from the rate so far; known is false where
// there is nothing to estimate from.
func (j *Job) Remaining() (left time.Duration, known bool) {
	rate := j.Rate()
	if j.State != Running || rate == 0 || j.Expected <= 0 {
		return 0, false
	}
	return time.Duration(float64(max(0, j.Expected-j.Done)) / rate * float64(time.Second)), true
}

var (
	// ErrUnknown tells that there is no such job or result, or no longer.
	ErrUnknown = errors.New("jobs: unknown")
	// ErrEnded tells that the job has ended and cannot be cancelled.
	ErrEnded = errors.New("jobs: ended already")
	// ErrFull tells that too much is waiting; the same call can succeed later.
	ErrFull = errors.New("jobs: too many waiting")
	// ErrCursor tells that a cursor is none of ours.
	ErrCursor = errors.New("jobs: unreadable cursor")
	// ErrStorage tells that the database could not be used; the same call can
	// succeed later.
	ErrStorage = errors.New("jobs: storage failed")
)
