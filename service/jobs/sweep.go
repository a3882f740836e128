package jobs

import (
	"context"
	"database/sql"
	"time"
)

// processLost is how long an engine must not have been seen before its jobs are run
// by another one.
const processLost = 60 * time.Second

// greet makes this process known. Where no other process can use the database, what
// is running in it was left by one that died.
func (b *Board) greet(ctx context.Context) error {
	if !b.db.shared {
		n, err := b.db.exec(ctx, `UPDATE railproof_jobs SET state = 'waiting', owner = '', queued = 0, deaths = deaths + 1, sequence = sequence + 1 WHERE state = 'running'`)
		if err != nil {
			return err
		}
		if n > 0 {
			b.counts.TakenOver.Add(n)
			b.o.Log.Warn("jobs that a process left unfinished are run again", "jobs", n)
		}
		if _, err := b.db.exec(ctx, `DELETE FROM railproof_processes`); err != nil {
			return err
		}
		if err := b.adopt(ctx, 0); err != nil {
			return err
		}
	}
	_, err := b.present(ctx)
	return err
}

// present says that this process is there. Others can be judged by how long they were
// not seen only if this one has looked all the while and the clock has not jumped.
func (b *Board) present(ctx context.Context) (judges bool, err error) {
	var now int64
	err = b.db.row(ctx, `INSERT INTO railproof_processes (id, engine, beat) VALUES ($1, $2, NOW()) ON CONFLICT (id) DO UPDATE SET beat = NOW() RETURNING beat`, b.process, b.o.Engine).Scan(&now)
	if err != nil {
		return false, err
	}
	between := now - b.seen.Swap(now)
	return 0 <= between && between < sweepMissed.Milliseconds(), nil
}

// leave says that this process is gone.
func (b *Board) leave() {
	ctx, cancel := context.WithTimeout(context.Background(), callTimeout)
	defer cancel()
	_, _ = b.db.exec(ctx, `DELETE FROM railproof_processes WHERE id = $1`, b.process) // its beat stops anyway
}

// adopt takes over jobs whose engine no process has run for a while: after an
// upgrade the new engine answers them.
func (b *Board) adopt(ctx context.Context, after time.Duration) error {
	n, err := b.db.exec(ctx, `UPDATE railproof_jobs SET engine = $1, queued = 0 WHERE engine <> $1 AND state = 'waiting'
		AND created <= NOW() - $2 AND engine NOT IN (SELECT engine FROM railproof_processes WHERE beat > NOW() - $2)`, b.o.Engine, after.Milliseconds())
	if err == nil && n > 0 {
		b.o.Log.Warn("jobs of an engine that nobody runs any more are run by this one", "jobs", n)
	}
	return err
}

// sweep queues again what was lost: jobs whose process died, and messages.
func (b *Board) sweep() {
	tick := time.NewTicker(sweepEvery)
	defer tick.Stop()
	var tidied time.Time
	for {
		ctx, cancel := context.WithTimeout(b.ctx, callTimeout)
		err := b.sweepOnce(ctx)
		if err == nil && time.Since(tidied) > tidyEvery {
			tidied = time.Now()
			err = b.tidy(ctx)
		}
		cancel()
		if b.ctx.Err() != nil {
			return
		}
		if err != nil {
			_ = b.failed(context.Background(), "sweeping", err)
		} else {
			b.works()
		}
		select {
		case <-b.ctx.Done():
			return
		case <-tick.C:
		}
	}
}

func (b *Board) sweepOnce(ctx context.Context) error {
	judges, err := b.present(ctx)
	if err != nil {
		return err
	}
	if b.db.shared && judges {
		if err := b.release(ctx); err != nil {
			return err
		}
		if err := b.adopt(ctx, processLost); err != nil {
			return err
		}
	}
	if err := b.releaseOwn(ctx); err != nil {
		return err
	}
	if err := b.giveUp(ctx); err != nil {
		return err
	}
	lost, err := b.lost(ctx)
	if err != nil {
		return err
	}
	for _, id := range lost {
		// First the mark: a message may be dealt with, and the mark taken back, at once.
		if _, err := b.db.exec(ctx, `UPDATE railproof_jobs SET queued = NOW() WHERE id = $1`, id); err != nil {
			return err
		}
		if err := b.db.queue.add(ctx, message{Job: id}); err != nil {
			b.unqueue(id)
			return err
		}
	}
	return nil
}

// stale holds for a beat that is too old, or from a clock that was ahead.
const stale = `(beat < NOW() - 10000 OR beat > NOW() + 10000)`

// release makes jobs wait again whose process died.
func (b *Board) release(ctx context.Context) error {
	n, err := b.db.exec(ctx, `UPDATE railproof_jobs SET state = 'waiting', owner = '', queued = 0, deaths = deaths + 1, sequence = sequence + 1 WHERE state = 'running' AND owner <> $1 AND `+stale, b.process)
	if err == nil && n > 0 {
		b.counts.TakenOver.Add(n)
		b.o.Log.Warn("jobs whose process stopped beating are run again", "jobs", n)
	}
	return err
}

// releaseOwn makes jobs wait again that this process took and no longer works on:
// it could not store how they ended.
func (b *Board) releaseOwn(ctx context.Context) error {
	mine, err := b.identifiers(ctx, `SELECT id FROM railproof_jobs WHERE state = 'running' AND owner = $1`, b.process)
	if err != nil {
		return err
	}
	for _, id := range mine {
		b.mutex.Lock()
		r := b.running[id]
		b.mutex.Unlock()
		if r != nil {
			continue
		}
		n, err := b.db.exec(ctx, `UPDATE railproof_jobs SET state = 'waiting', owner = '', queued = 0, sequence = sequence + 1 WHERE id = $1 AND owner = $2 AND state = 'running'`, id, b.process)
		if err != nil {
			return err
		}
		if n == 0 { // it ended meanwhile
			continue
		}
		b.o.Log.Warn("a job whose end could not be stored is run again", "job", id)
	}
	return nil
}

// giveUp fails jobs over which several processes have died.
func (b *Board) giveUp(ctx context.Context) error {
	n, err := b.db.exec(ctx, `UPDATE railproof_jobs SET state = 'failed', sequence = sequence + 1, ended = NOW() WHERE state = 'waiting' AND deaths >= $1`, mostDeaths)
	if err == nil && n > 0 {
		b.counts.Failed.Add(n)
		b.o.Log.Error("jobs given up: every process that ran them died", "jobs", n, "deaths", mostDeaths)
	}
	return err
}

// lost returns waiting jobs that are in no queue: those that were taken out, those that
// still wait some time after an empty queue had them, and, in case messages are lost
// while the queue is never empty, those that have waited for long.
func (b *Board) lost(ctx context.Context) ([]string, error) {
	empty, err := b.db.queue.empty(ctx)
	if err != nil {
		return nil, err
	}
	patience := queueLost
	if empty {
		patience = messageLost
	}
	return b.identifiers(ctx, `SELECT id FROM railproof_jobs WHERE engine = $1 AND state = 'waiting' AND (queued < NOW() - $2 OR queued > NOW() + $2) ORDER BY id LIMIT 100`, b.o.Engine, patience.Milliseconds())
}

func (b *Board) identifiers(ctx context.Context, statement string, args ...any) ([]string, error) {
	rows, err := b.db.rows(ctx, statement, args...)
	if err != nil {
		return nil, err
	}
	defer rows.Close()
	var list []string
	for rows.Next() {
		var id string
		if err := rows.Scan(&id); err != nil {
			return nil, err
		}
		list = append(list, id)
	}
	return list, rows.Err()
}

// unqueue makes the next sweep queue a job that waits.
func (b *Board) unqueue(id string) {
	ctx, cancel := context.WithTimeout(b.ctx, callTimeout)
	defer cancel()
	_, _ = b.db.exec(ctx, `UPDATE railproof_jobs SET queued = 0 WHERE id = $1 AND state = 'waiting'`, id) // otherwise it is queued again after queueLost
}

// tidy drops what is older or larger than is kept: results from the oldest, and in the
// same moment the jobs that had them, so that asking again computes again.
func (b *Board) tidy(ctx context.Context) error {
	return b.db.transaction(ctx, func(tx *sql.Tx) error { return b.tidyIn(ctx, tx) })
}

func (b *Board) tidyIn(ctx context.Context, tx *sql.Tx) error {
	for _, step := range []struct {
		statement string
		argument  any
	}{
		{`UPDATE railproof_schema SET version = version WHERE version = $1`, 1}, // one process at a time
		{`DELETE FROM railproof_results WHERE created < NOW() - $1`, b.o.KeepFor.Milliseconds()},
		{`DELETE FROM railproof_results WHERE id IN (SELECT id FROM (SELECT id, SUM(size) OVER (ORDER BY created DESC, id) AS held FROM railproof_results) AS sums WHERE held > $1)`, b.o.KeepBytes},
		{`DELETE FROM railproof_jobs WHERE ended > 0 AND ended < NOW() - $1`, b.o.KeepFor.Milliseconds()},
		{`DELETE FROM railproof_jobs WHERE state = 'done' AND ended < NOW() - $1 AND NOT EXISTS (SELECT 1 FROM railproof_results WHERE id = result_id)`, 0},
		{`DELETE FROM railproof_parts WHERE beat < NOW() - $1 AND NOT EXISTS (SELECT 1 FROM railproof_jobs WHERE id = job AND state IN ('waiting', 'running'))`, time.Minute.Milliseconds()},
		{`DELETE FROM railproof_processes WHERE beat < NOW() - $1`, time.Hour.Milliseconds()},
	} {
		if _, err := tx.ExecContext(ctx, b.db.say(step.statement), step.argument); err != nil {
			return err
		}
	}
	return nil
}
