package jobs

import (
	"context"
	"crypto/sha256"
	"encoding/hex"
	"fmt"
	"log/slog"
	"time"

	"github.com/riverqueue/river"
	"github.com/riverqueue/river/riverdriver"
	"github.com/riverqueue/river/rivermigrate"
)

// message is what the queue carries: a job to look at, or a part of one.
type message struct {
	Job  string `json:"job"`
	Part bool   `json:"part,omitempty"` // look for a part that nobody has taken
}

// Kind names the messages in the queue's table.
func (message) Kind() string { return "railproof_job" }

const (
	fetchCooldown = 10 * time.Millisecond // between fetches: the default of 100 ms makes small jobs slow
	fetchPoll     = time.Second           // where nothing wakes the queue
	queueAttempts = 2
	queueMargin   = time.Minute // of the queue's own time limits beyond ours
	queueKeep     = time.Hour   // of messages that were dealt with
)

// worker deals with messages.
type worker struct {
	river.WorkerDefaults[message]
	deal func(context.Context, message)
}

func (w *worker) Work(ctx context.Context, j *river.Job[message]) error {
	w.deal(ctx, j.Args)
	return nil
}

// riverQueue is a queue kept by River in either database.
type riverQueue[Tx any] struct {
	client *river.Client[Tx]
	name   string
}

// queueName keeps the messages of different engines apart: a job's answer depends on
// the engine.
func queueName(engine string) string {
	sum := sha256.Sum256([]byte(engine))
	return "engine-" + hex.EncodeToString(sum[:8])
}

func newRiver[Tx any](driver riverdriver.Driver[Tx], deal func(context.Context, message), o *Options) (queue, error) {
	workers := river.NewWorkers()
	if err := river.AddWorkerSafely(workers, &worker{deal: deal}); err != nil {
		return nil, fmt.Errorf("jobs: queue: %w", err)
	}
	name := queueName(o.Engine)
	client, err := river.NewClient(driver, &river.Config{
		Queues:                      map[string]river.QueueConfig{name: {MaxWorkers: o.Workers}},
		Workers:                     workers,
		FetchCooldown:               fetchCooldown,
		FetchPollInterval:           fetchPoll,
		JobTimeout:                  o.Deadline + queueMargin, // finite: a message without limit is never rescued
		RescueStuckJobsAfter:        o.Deadline + 2*queueMargin,
		MaxAttempts:                 queueAttempts,
		CompletedJobRetentionPeriod: queueKeep,
		CancelledJobRetentionPeriod: queueKeep,
		DiscardedJobRetentionPeriod: queueKeep,
		Logger:                      slog.New(atLeast{slog.LevelWarn, o.Log.Handler()}),
	})
	if err != nil {
		return nil, fmt.Errorf("jobs: queue: %w", err)
	}
	return &riverQueue[Tx]{client, name}, nil
}

func migrateQueue[Tx any](ctx context.Context, driver riverdriver.Driver[Tx], o *Options) error {
	m, err := rivermigrate.New(driver, &rivermigrate.Config{Logger: slog.New(atLeast{slog.LevelWarn, o.Log.Handler()})})
	if err != nil {
		return fmt.Errorf("jobs: schema of the queue: %w", err)
	}
	if _, err := m.Migrate(ctx, rivermigrate.DirectionUp, nil); err != nil {
		return fmt.Errorf("jobs: schema of the queue: %w", err)
	}
	return nil
}

func (q *riverQueue[Tx]) add(ctx context.Context, m message) error {
	_, err := q.client.Insert(ctx, m, &river.InsertOpts{Queue: q.name})
	return err
}

func (q *riverQueue[Tx]) empty(ctx context.Context) (bool, error) {
	list, err := q.client.JobList(ctx, river.NewJobListParams().Queues(q.name).States("available").First(1))
	if err != nil {
		return false, err
	}
	return len(list.Jobs) == 0, nil
}

func (q *riverQueue[Tx]) start(ctx context.Context) error { return q.client.Start(ctx) }

func (q *riverQueue[Tx]) stop(ctx context.Context) error { return q.client.Stop(ctx) }

// atLeast lets through what is at least as grave as a level: the queue tells much
// about itself.
type atLeast struct {
	level slog.Level
	slog.Handler
}

func (h atLeast) Enabled(ctx context.Context, l slog.Level) bool {
	return l >= h.level && h.Handler.Enabled(ctx, l)
}

func (h atLeast) WithAttrs(a []slog.Attr) slog.Handler {
	return atLeast{h.level, h.Handler.WithAttrs(a)}
}

func (h atLeast) WithGroup(name string) slog.Handler {
	return atLeast{h.level, h.Handler.WithGroup(name)}
}
