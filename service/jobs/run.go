package jobs

import (
	"context"
	"database/sql"
	"errors"
	"sync/atomic"
	"time"

	"railproof/service"
)

var errCancelled = errors.New("jobs: cancelled")

// run is a job that this process works on.
type run struct {
	id, operation string
	request       []byte
	meter         *service.Meter
	inParts       atomic.Int64 // evaluations done in parts, by all processes
	stop          context.CancelCauseFunc
}

func (r *run) progress() (done, expected int64) {
	done, expected = r.meter.Progress()
	return done + r.inParts.Load(), expected
}

// deal takes a job, or a part of one, and works on it.
func (b *Board) deal(_ context.Context, m message) {
	if m.Part {
		b.help(m.Job)
		return
	}
	ctx, cancel := context.WithTimeout(b.ctx, b.o.Deadline)
	defer cancel()
	ctx, stop := context.WithCancelCause(ctx)
	defer stop(nil)
	r := &run{id: m.Job, meter: new(service.Meter), stop: stop}
	if !b.claim(ctx, r) {
		return
	}
	defer b.forget(r)
	b.o.Log.Info("job taken", "job", r.id, "operation", r.operation)
	began := time.Now()
	beating := b.beat(ctx, r)
	outcome := b.execute(ctx, r)
	cause := context.Cause(ctx)
	stop(nil)
	<-beating
	switch {
	case outcome.Answer.Body != nil: // it is right, whatever has happened meanwhile
		b.finish(r, outcome, time.Since(began))
	case errors.Is(cause, errStopping):
		b.giveBack(r)
	case errors.Is(cause, errCancelled):
		b.o.Log.Info("job stopped", "job", r.id, "cause", cause)
	default:
		b.finish(r, outcome, time.Since(began))
	}
}

// claim takes the job for this process if nobody works on it.
func (b *Board) claim(ctx context.Context, r *run) bool {
	b.mutex.Lock()
	if b.running[r.id] != nil { // ours already, or no more: a process that slept is late to see that it lost the job
		b.mutex.Unlock()
		b.unqueue(r.id)
		return false
	}
	b.running[r.id] = r
	b.mutex.Unlock()
	err := b.db.row(ctx, `UPDATE railproof_jobs SET state = 'running', owner = $2, beat = NOW(), sequence = sequence + 1, claims = claims + 1,
			started = CASE WHEN started = 0 THEN NOW() ELSE started END
		WHERE id = $1 AND engine = $3 AND state = 'waiting' RETURNING operation, request`, r.id, b.process, b.o.Engine).Scan(&r.operation, &r.request)
	if err != nil {
		if !errors.Is(err, sql.ErrNoRows) {
			_ = b.failed(ctx, "taking a job", err) // the sweep queues it again
			b.unqueue(r.id)
		}
		b.forget(r)
		return false
	}
	b.works()
	b.tell(r.id)
	return true
}

func (b *Board) forget(r *run) {
	b.mutex.Lock()
	delete(b.running, r.id)
	b.mutex.Unlock()
	b.tell(r.id)
}

// stop ends what this process does for a job.
func (b *Board) stop(id string, cause error) {
	b.mutex.Lock()
	defer b.mutex.Unlock()
	if r := b.running[id]; r != nil {
		r.stop(cause)
	}
}

// beat says in the database that the job is alive and how far it is, and ends the
// run if somebody cancelled it there. The channel closes when it has stopped.
func (b *Board) beat(ctx context.Context, r *run) <-chan struct{} {
	ended := make(chan struct{})
	b.idle.Go(func() {
		defer close(ended)
		look := time.NewTicker(b.db.watch)
		defer look.Stop()
		last := time.Now()
		for {
			select {
			case <-ctx.Done():
				return
			case <-look.C:
			}
			beat := time.Since(last) >= beatEvery
			if beat {
				last = time.Now()
			}
			if !b.alive(ctx, r, beat) && ctx.Err() == nil {
				r.stop(errCancelled)
				return
			}
		}
	})
	return ended
}

// alive reports whether the job is still ours to do. While the database cannot be
// asked, it is.
func (b *Board) alive(ctx context.Context, r *run, beat bool) bool {
	look, cancel := context.WithTimeout(ctx, lookTimeout)
	defer cancel()
	var state State
	var err error
	if beat {
		done, expected := r.progress()
		err = b.db.row(look, `UPDATE railproof_jobs SET beat = NOW(), done = $3, expected = $4, sequence = sequence + 1
			WHERE id = $1 AND owner = $2 AND state = 'running' RETURNING state`, r.id, b.process, done, expected).Scan(&state)
	} else {
		err = b.db.row(look, `SELECT state FROM railproof_jobs WHERE id = $1 AND owner = $2 AND state = 'running'`, r.id, b.process).Scan(&state)
	}
	if err != nil && !errors.Is(err, sql.ErrNoRows) {
		_ = b.failed(ctx, "a job's beat", err)
		return true
	}
	if beat {
		b.tell(r.id)
	}
	return err == nil
}

// busyPause is how long a job waits for a slot before it asks again.
const busyPause = 50 * time.Millisecond

// execute runs the job, in parts where other processes can help.
func (b *Board) execute(ctx context.Context, r *run) Outcome {
	for {
		o := b.whole(ctx, r)
		if !o.Busy {
			return o
		}
		select {
		case <-ctx.Done():
			return b.o.Executor.Execute(ctx, r.operation, r.request, r.meter) // which says why it does not begin
		case <-time.After(busyPause):
		}
	}
}

func (b *Board) whole(ctx context.Context, r *run) Outcome {
	if s, can := b.o.Executor.(Splitter); can && b.db.shared {
		if n, evaluations := s.Parts(r.operation, r.request); n > 1 {
			r.meter.Expect(evaluations)
			return b.inParts(ctx, s, r, n)
		}
	}
	return b.o.Executor.Execute(ctx, r.operation, r.request, r.meter)
}

// finish stores the outcome, and goes on trying while the database cannot be used.
func (b *Board) finish(r *run, o Outcome, took time.Duration) {
	until := time.Now().Add(keepTrying)
	for {
		kept, err := b.store(r, o)
		if err == nil && !kept {
			b.works()
			b.o.Log.Info("job stopped", "job", r.id, "cause", errCancelled)
			return
		}
		if err == nil {
			break
		}
		_ = b.failed(context.Background(), "storing a result", err)
		select {
		case <-b.ctx.Done():
			return // the job is taken over when its beat has stopped
		case <-time.After(time.Second):
		}
		if time.Now().After(until) {
			return
		}
	}
	b.works()
	done, _ := r.progress()
	state := Done
	if o.Answer.Body == nil {
		state = Failed
	}
	b.counts.ended(state)
	if o.Cause != nil {
		b.o.Log.Error("job failed by a fault of ours", "job", r.id, "cause", o.Cause)
	}
	b.o.Log.Info("job ended", "job", r.id, "operation", r.operation, "state", state, "result_id", o.ResultID, "evaluations", done, "took", took)
}

// errNotOurs ends the storing of what is no longer wanted.
var errNotOurs = errors.New("jobs: cancelled, ended or taken over")

// store keeps how a job ended; kept is false where that is not wanted any more. An answer
// ends the job whoever has it by now: every process would find the same. A problem may be
// that of this process alone, which slept, say, until its time was over.
func (b *Board) store(r *run, o Outcome) (kept bool, err error) {
	ctx, cancel := context.WithTimeout(context.Background(), callTimeout)
	defer cancel()
	done, expected := r.progress()
	state, resultID, problem := Failed, "", o.Problem
	if o.Answer.Body != nil {
		state, resultID, problem = Done, o.ResultID, nil
	}
	err = b.db.transaction(ctx, func(tx *sql.Tx) error {
		ended, err := tx.ExecContext(ctx, b.db.say(`UPDATE railproof_jobs SET state = $2, problem = $3, done = $4, expected = $5, sequence = sequence + 1, ended = NOW(),
			result_id = CASE WHEN $6 = '' THEN result_id ELSE $6 END
			WHERE id = $1 AND (state = 'running' AND owner = $7 OR state IN ('waiting', 'running') AND $2 = 'done')`), r.id, state, problem, done, expected, resultID, b.process)
		if err != nil {
			return err
		}
		if n, err := ended.RowsAffected(); err != nil || n == 0 {
			return errors.Join(err, errNotOurs)
		}
		if state == Done {
			if _, err := tx.ExecContext(ctx, b.db.say(`INSERT INTO railproof_results (id, operation, media, body, size, created) VALUES ($1, $2, $3, $4, $5, NOW()) ON CONFLICT DO NOTHING`), o.ResultID, r.operation, o.Answer.Media, o.Answer.Body, len(o.Answer.Body)); err != nil {
				return err
			}
		}
		_, err = tx.ExecContext(ctx, b.db.say(`DELETE FROM railproof_parts WHERE job = $1`), r.id)
		return err
	})
	if errors.Is(err, errNotOurs) {
		return false, nil
	}
	return err == nil, err
}

// giveBack lets another process, or the next one, take the job.
func (b *Board) giveBack(r *run) {
	ctx, cancel := context.WithTimeout(context.Background(), callTimeout)
	defer cancel()
	_, err := b.db.exec(ctx, `UPDATE railproof_jobs SET state = 'waiting', owner = '', beat = 0, queued = 0, sequence = sequence + 1 WHERE id = $1 AND owner = $2 AND state = 'running'`, r.id, b.process)
	if err != nil {
		b.o.Log.Warn("a job could not be given back; it is taken over when its beat has stopped", "job", r.id, "cause", err)
		return
	}
	b.o.Log.Info("job given back", "job", r.id)
}
