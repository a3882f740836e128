package jobs

import (
	"context"
	"database/sql"
	"errors"
	"fmt"
	"sync"
	"sync/atomic"
	"time"

	"railproof/service/results"
)

// Board takes, runs and remembers jobs. It is safe for concurrent use.
type Board struct {
	o       Options
	db      *database
	process string // names this process in the database

	ctx  context.Context // ends when running work must stop
	halt context.CancelCauseFunc
	idle sync.WaitGroup // what runs beside the queue

	mutex   sync.Mutex
	running map[string]*run
	watched map[string]*change // jobs that somebody waits for

	seen    atomic.Int64           // [ms] the database's clock at the last sweep
	trouble atomic.Pointer[string] // why the database could not be used the last time; nil: it could
	counts  Counts
}

// errStopping is why work ends when the process does; such work is given back.
var errStopping = errors.New("jobs: the process is ending")

// Open opens the database, brings its schema up to date and begins to work.
func Open(ctx context.Context, o Options) (*Board, error) {
	o.fill()
	b := &Board{o: o, process: newID("process_", time.Now()), running: map[string]*run{}, watched: map[string]*change{}}
	b.ctx, b.halt = context.WithCancelCause(context.WithoutCancel(ctx))
	var err error
	if o.DSN != "" {
		b.db, err = openPostgres(ctx, o.DSN, b.deal, &b.o)
	} else {
		b.db, err = openSQLite(ctx, o.Directory, b.deal, &b.o)
	}
	if err != nil {
		return nil, err
	}
	if err := b.greet(ctx); err != nil {
		_ = b.db.close()
		return nil, fmt.Errorf("%w: %w", ErrStorage, err)
	}
	if err := b.db.queue.start(b.ctx); err != nil {
		_ = b.db.close()
		return nil, fmt.Errorf("jobs: queue: %w", err)
	}
	b.idle.Go(b.sweep)
	return b, nil
}

// Close takes no more work, lets what runs go on until the context ends, gives the
// rest back and closes the database.
func (b *Board) Close(ctx context.Context) error {
	stopped := b.db.queue.stop(ctx)
	b.halt(errStopping)
	if stopped != nil { // what runs ends now and is given back
		last, cancel := context.WithTimeout(context.WithoutCancel(ctx), callTimeout)
		defer cancel()
		stopped = b.db.queue.stop(last)
	}
	b.idle.Wait()
	b.leave()
	if err := b.db.close(); err != nil {
		return fmt.Errorf("jobs: closing the database: %w", err)
	}
	return stopped
}

const columns = `id, operation, result_id, state, sequence, done, expected, problem, created, ended,
	CASE WHEN started = 0 THEN 0 WHEN ended > 0 THEN ended - started ELSE NOW() - started END`

type scanner interface{ Scan(into ...any) error }

func scan(row scanner) (Job, error) {
	var j Job
	var created, ended, ran int64
	err := row.Scan(&j.ID, &j.Operation, &j.ResultID, &j.State, &j.Sequence, &j.Done, &j.Expected, &j.Problem, &created, &ended, &ran)
	j.Created, j.Ran = time.UnixMilli(created).UTC(), time.Duration(ran)*time.Millisecond
	if ended > 0 {
		j.Ended = time.UnixMilli(ended).UTC()
	}
	return j, err
}

// Submit keeps a request as a job, or finds the job that does the same: existing
// tells. When it returns, the job survives the end of the process.
func (b *Board) Submit(ctx context.Context, r Request) (j Job, existing bool, err error) {
	if j, err := b.same(ctx, r.ResultID); !errors.Is(err, ErrUnknown) {
		return j, err == nil, err
	}
	var waiting int
	if err := b.db.row(ctx, `SELECT COUNT(*) FROM railproof_jobs WHERE state = 'waiting'`).Scan(&waiting); err != nil {
		return Job{}, false, b.failed(ctx, "counting jobs", err)
	}
	if waiting >= b.o.Waiting {
		return Job{}, false, ErrFull
	}
	id := newID("job_", time.Now())
	n, err := b.db.exec(ctx, `INSERT INTO railproof_jobs (id, engine, operation, request_key, result_id, request, state, sequence, claims, deaths, owner, beat, queued, done, expected, created, started, ended)
		VALUES ($1, $2, $3, $4, $4, $5, 'waiting', 1, 0, 0, '', 0, NOW(), 0, 0, NOW(), 0, 0) ON CONFLICT DO NOTHING`,
		id, b.o.Engine, r.Operation, r.ResultID, r.Body)
	if err != nil {
		return Job{}, false, b.failed(ctx, "storing a job", err)
	}
	b.works()
	if n == 0 { // another caller was faster
		j, err := b.same(ctx, r.ResultID)
		return j, true, err
	}
	b.counts.Accepted.Add(1)
	if err := b.db.queue.add(ctx, message{Job: id}); err != nil {
		b.o.Log.Warn("a job was stored but not queued; the next sweep does that", "job", id, "cause", err)
		b.unqueue(id)
	}
	j, err = b.Get(ctx, id)
	return j, false, err
}

// same finds the job that has the answer or will have it.
func (b *Board) same(ctx context.Context, resultID string) (Job, error) {
	j, err := scan(b.db.row(ctx, `SELECT `+columns+` FROM railproof_jobs WHERE request_key = $1 AND state IN ('waiting', 'running', 'done')`, resultID))
	return b.live(j), b.found(ctx, err)
}

// Get returns a job.
func (b *Board) Get(ctx context.Context, id string) (Job, error) {
	j, err := scan(b.db.row(ctx, `SELECT `+columns+` FROM railproof_jobs WHERE id = $1`, id))
	return b.live(j), b.found(ctx, err)
}

// live puts in what this process knows better than the database.
func (b *Board) live(j Job) Job {
	if j.State != Running {
		return j
	}
	b.mutex.Lock()
	defer b.mutex.Unlock()
	if r := b.running[j.ID]; r != nil {
		done, expected := r.progress()
		j.Done, j.Expected = max(j.Done, done), max(j.Expected, expected)
	}
	return j
}

// List returns jobs, the newest first, from where the cursor points, and the cursor
// of the next page; "" on the last.
func (b *Board) List(ctx context.Context, cursor string, limit int) (list []Job, next string, err error) {
	before := "job_~" // sorts behind every identifier
	if cursor != "" {
		if before, err = decodeCursor(cursor); err != nil {
			return nil, "", err
		}
	}
	rows, err := b.db.rows(ctx, `SELECT `+columns+` FROM railproof_jobs WHERE id < $1 ORDER BY id DESC LIMIT $2`, before, limit+1)
	if err != nil {
		return nil, "", b.failed(ctx, "listing jobs", err)
	}
	defer rows.Close()
	for rows.Next() {
		j, err := scan(rows)
		if err != nil {
			return nil, "", b.failed(ctx, "listing jobs", err)
		}
		list = append(list, b.live(j))
	}
	if err := rows.Err(); err != nil {
		return nil, "", b.failed(ctx, "listing jobs", err)
	}
	if len(list) > limit {
		list = list[:limit]
		next = encodeCursor(list[limit-1].ID)
	}
	return list, next, nil
}

// Cancel ends a job. One that has been cancelled already is returned as it is.
func (b *Board) Cancel(ctx context.Context, id string) (Job, error) {
	n, err := b.db.exec(ctx, `UPDATE railproof_jobs SET state = 'cancelled', sequence = sequence + 1, ended = NOW() WHERE id = $1 AND state IN ('waiting', 'running')`, id)
	if err != nil {
		return Job{}, b.failed(ctx, "cancelling a job", err)
	}
	if n > 0 {
		b.counts.Cancelled.Add(1)
		b.stop(id, errCancelled)
		b.tell(id)
	}
	j, err := b.Get(ctx, id)
	if err == nil && j.State != Cancelled {
		return j, ErrEnded
	}
	return j, err
}

// Result returns the answer of a finished job.
func (b *Board) Result(ctx context.Context, resultID string) (results.Answer, error) {
	var a results.Answer
	err := b.db.row(ctx, `SELECT operation, media, body FROM railproof_results WHERE id = $1`, resultID).Scan(&a.Operation, &a.Media, &a.Body)
	return a, b.found(ctx, err)
}

// found turns the outcome of looking for one row into ours.
func (b *Board) found(ctx context.Context, err error) error {
	if errors.Is(err, sql.ErrNoRows) {
		b.works()
		return ErrUnknown
	}
	if err != nil {
		return b.failed(ctx, "reading", err)
	}
	b.works()
	return nil
}

// failed notes that the database could not be used, unless the caller went away.
func (b *Board) failed(ctx context.Context, doing string, err error) error {
	if gone := context.Cause(ctx); gone != nil {
		return gone
	}
	text := doing + " failed"
	if b.trouble.Swap(&text) == nil {
		b.o.Log.Error("the job database cannot be used", "doing", doing, "cause", err)
	}
	return fmt.Errorf("%w: %s: %w", ErrStorage, doing, err)
}

// works notes that the database could be used.
func (b *Board) works() {
	if b.trouble.Swap(nil) != nil {
		b.o.Log.Info("the job database can be used again")
	}
}

// Trouble tells why the database could not be used the last time it was needed, ""
// if it could.
func (b *Board) Trouble() string {
	if t := b.trouble.Load(); t != nil {
		return *t
	}
	return ""
}
