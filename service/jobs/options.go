package jobs

import (
	"log/slog"
	"time"
)

// Options sets up a Board; a zero field means its default.
type Options struct {
	Executor  Executor      // required
	Engine    string        // required: what computes; only processes of the same one share a job
	DSN       string        // PostgreSQL; empty: SQLite
	Directory string        // of the SQLite file; empty: in memory
	Workers   int           // jobs that run at once in this process; default 2
	Waiting   int           // jobs that may wait; default 10,000
	Deadline  time.Duration // for one job; default 15 min
	KeepFor   time.Duration // after the end of a job; default 7 days
	KeepBytes int64         // [bytes] of results; default 1 GiB
	Log       *slog.Logger  // default: none
}

func (o *Options) fill() {
	if o.Workers == 0 {
		o.Workers = 2
	}
	if o.Waiting == 0 {
		o.Waiting = 10_000
	}
	if o.Deadline == 0 {
		o.Deadline = 15 * time.Minute
	}
	if o.KeepFor == 0 {
		o.KeepFor = 7 * 24 * time.Hour
	}
	if o.KeepBytes == 0 {
		o.KeepBytes = 1 << 30
	}
	if o.Log == nil {
		o.Log = slog.New(slog.DiscardHandler)
	}
}

const (
	beatEvery   = 500 * time.Millisecond // a running job says that it is alive, and how far it is
	beatLost    = 10 * time.Second       // without a beat for so long, another process takes it over
	sweepEvery  = 2 * time.Second        // looking for such jobs
	sweepMissed = 5 * time.Second        // between two sweeps: this process slept, the database was away, or its clock jumped
	messageLost = 10 * time.Second       // after which a job waits in vain that an empty queue had
	queueLost   = 5 * time.Minute        // and one that any queue had
	mostDeaths  = 3                      // processes that may die over one job
	keepTrying  = 10 * time.Minute       // to store a result while the database cannot be used
	tidyEvery   = time.Minute
	lookTimeout = 5 * time.Second  // for one look at a running job; it is looked at again
	callTimeout = 10 * time.Second // for one call of the database that no caller waits for
)
