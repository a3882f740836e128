package jobs

import (
	"context"
	"database/sql"
	"errors"
	"time"

	"railproof/service"
)

const (
	mostHelpers = 8 // messages that call other processes to help with one job
	partsPause  = 20 * time.Millisecond
	partWatch   = lookEvery
)

// inParts lets every process that has a free worker take parts of the job, takes
// parts itself until none is left, and merges them in their order.
func (b *Board) inParts(ctx context.Context, s Splitter, r *run, parts int) Outcome {
	if err := b.layOut(ctx, r.id, parts); err != nil {
		_ = b.failed(ctx, "laying out parts", err)
		return Outcome{Busy: true}
	}
	for range min(parts-1, mostHelpers) {
		if err := b.db.queue.add(ctx, message{Job: r.id, Part: true}); err != nil {
			break // they help or they do not
		}
	}
	for {
		worked, err := b.onePart(ctx, s, r)
		if err != nil {
			return b.broken(ctx, r, err)
		}
		if worked {
			continue
		}
		bodies, err := b.finished(ctx, r, parts)
		if err == nil && bodies != nil {
			return s.Merge(ctx, r.operation, r.request, bodies)
		}
		select {
		case <-ctx.Done():
			return Outcome{Busy: true}
		case <-time.After(partsPause):
		}
	}
}

// broken runs a job of which a part failed as a whole: it fails in the same way and
// says why in the caller's terms.
func (b *Board) broken(ctx context.Context, r *run, err error) Outcome {
	if ctx.Err() != nil {
		return Outcome{Busy: true}
	}
	b.o.Log.Warn("a part of a job failed", "job", r.id, "cause", err)
	return b.o.Executor.Execute(ctx, r.operation, r.request, r.meter)
}

func (b *Board) layOut(ctx context.Context, job string, parts int) error {
	return b.db.transaction(ctx, func(tx *sql.Tx) error {
		for i := range parts {
			if _, err := tx.ExecContext(ctx, b.db.say(`INSERT INTO railproof_parts (job, part, owner, beat, done) VALUES ($1, $2, '', NOW(), 0) ON CONFLICT DO NOTHING`), job, i); err != nil {
				return err
			}
		}
		return nil
	})
}

// help works on parts of another process's job until none is left.
func (b *Board) help(job string) {
	s, can := b.o.Executor.(Splitter)
	if !can {
		return
	}
	ctx, cancel := context.WithTimeout(b.ctx, b.o.Deadline)
	defer cancel()
	r := &run{id: job, meter: new(service.Meter)}
	err := b.db.row(ctx, `SELECT operation, request FROM railproof_jobs WHERE id = $1 AND state = 'running' AND engine = $2`, job, b.o.Engine).Scan(&r.operation, &r.request)
	if err != nil {
		return // ended meanwhile
	}
	for {
		if worked, err := b.onePart(ctx, s, r); err != nil || !worked {
			if err != nil && ctx.Err() == nil {
				b.o.Log.Warn("helping with a job failed", "job", job, "cause", err)
			}
			return
		}
	}
}

// onePart takes a part that nobody has and runs it; worked is false if there was
// none.
func (b *Board) onePart(ctx context.Context, s Splitter, r *run) (worked bool, err error) {
	var part, parts int
	err = b.db.row(ctx, `UPDATE railproof_parts SET owner = $2, beat = NOW(), done = 0 WHERE job = $1 AND part = (
			SELECT part FROM railproof_parts WHERE job = $1 AND body IS NULL AND (owner = '' OR `+stale+`) ORDER BY part LIMIT 1 FOR UPDATE SKIP LOCKED)
		RETURNING part, (SELECT COUNT(*) FROM railproof_parts WHERE job = $1)`, r.id, b.process).Scan(&part, &parts)
	if errors.Is(err, sql.ErrNoRows) {
		return false, nil
	}
	if err != nil {
		return false, b.waited(ctx, "taking a part", err)
	}
	ctx, stop := context.WithCancelCause(ctx)
	defer stop(nil)
	meter := new(service.Meter)
	watched := b.watchPart(ctx, stop, r, part, meter)
	body, err := s.Part(ctx, r.operation, r.request, part, parts, meter)
	if err == nil {
		done, _ := meter.Progress()
		err = b.storePart(ctx, r.id, part, body, done)
	}
	stop(nil)
	<-watched
	if err != nil {
		b.dropPart(r.id, part)
		return false, err
	}
	return true, nil
}

// storePart keeps what a part left, and goes on trying while the database cannot be used.
func (b *Board) storePart(ctx context.Context, job string, part int, body []byte, done int64) error {
	once := func() error {
		store, cancel := context.WithTimeout(context.WithoutCancel(ctx), callTimeout)
		defer cancel()
		_, err := b.db.exec(store, `UPDATE railproof_parts SET body = $3, owner = $4, done = $5 WHERE job = $1 AND part = $2 AND body IS NULL`, job, part, body, b.process, done)
		return err
	}
	for {
		err := once()
		if err == nil {
			return nil
		}
		if err := b.waited(ctx, "storing a part", err); err != nil {
			return err
		}
	}
}

// waited lets a database that cannot be used recover.
func (b *Board) waited(ctx context.Context, doing string, err error) error {
	_ = b.failed(ctx, doing, err)
	select {
	case <-ctx.Done():
		return context.Cause(ctx)
	case <-time.After(time.Second):
		return nil
	}
}

// watchPart beats for a part and stops it when its job is no longer running. A beat that
// arrives late, after the part was stored, changes nothing of its count.
func (b *Board) watchPart(ctx context.Context, stop context.CancelCauseFunc, r *run, part int, m *service.Meter) <-chan struct{} {
	ended := make(chan struct{})
	b.idle.Go(func() {
		defer close(ended)
		tick := time.NewTicker(partWatch)
		defer tick.Stop()
		for {
			select {
			case <-ctx.Done():
				return
			case <-tick.C:
			}
			done, _ := m.Progress()
			var state State
			var all int64
			look, cancel := context.WithTimeout(ctx, lookTimeout)
			err := b.db.row(look, `UPDATE railproof_parts SET beat = NOW(), done = CASE WHEN body IS NULL THEN $3 ELSE done END WHERE job = $1 AND part = $2
				RETURNING (SELECT state FROM railproof_jobs WHERE id = $1), (SELECT COALESCE(SUM(done), 0) FROM railproof_parts WHERE job = $1)`, r.id, part, done).Scan(&state, &all)
			cancel()
			if ctx.Err() == nil && (errors.Is(err, sql.ErrNoRows) || err == nil && state != Running) {
				stop(errCancelled)
				return
			}
			if err == nil {
				r.inParts.Store(all)
			}
		}
	})
	return ended
}

func (b *Board) dropPart(job string, part int) {
	ctx, cancel := context.WithTimeout(context.Background(), callTimeout)
	defer cancel()
	_, _ = b.db.exec(ctx, `UPDATE railproof_parts SET owner = '' WHERE job = $1 AND part = $2 AND owner = $3 AND body IS NULL`, job, part, b.process) // its beat stops anyway
}

// finished returns what all parts left, nil while one is missing.
func (b *Board) finished(ctx context.Context, r *run, parts int) ([][]byte, error) {
	var left int
	var done int64
	err := b.db.row(ctx, `SELECT COUNT(CASE WHEN body IS NULL THEN 1 END), COALESCE(SUM(done), 0) FROM railproof_parts WHERE job = $1`, r.id).Scan(&left, &done)
	if err != nil {
		return nil, err
	}
	r.inParts.Store(done)
	if left > 0 {
		return nil, nil
	}
	rows, err := b.db.rows(ctx, `SELECT body FROM railproof_parts WHERE job = $1 ORDER BY part`, r.id)
	if err != nil {
		return nil, err
	}
	defer rows.Close()
	bodies := make([][]byte, 0, parts)
	for rows.Next() {
		var body []byte
		if err := rows.Scan(&body); err != nil {
			return nil, err
		}
		bodies = append(bodies, body)
	}
	if err := rows.Err(); err != nil || len(bodies) != parts {
		return nil, err
	}
	return bodies, nil
}
