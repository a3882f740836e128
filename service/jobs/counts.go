package jobs

import (
	"context"
	"sync/atomic"
)

// Counts are what happened to jobs in this process since it started.
type Counts struct{ Accepted, Done, Failed, Cancelled, TakenOver atomic.Int64 }

func (c *Counts) ended(s State) {
	switch s {
	case Done:
		c.Done.Add(1)
	case Failed:
		c.Failed.Add(1)
	}
}

// Counts returns them; the fields go on counting.
func (b *Board) Counts() *Counts { return &b.counts }

// ByState returns the number of jobs in each state, in all processes.
func (b *Board) ByState(ctx context.Context) (map[State]int, error) {
	n := map[State]int{Waiting: 0, Running: 0, Done: 0, Failed: 0, Cancelled: 0}
	rows, err := b.db.rows(ctx, `SELECT state, COUNT(*) FROM railproof_jobs GROUP BY state`)
	if err != nil {
		return nil, b.failed(ctx, "counting jobs", err)
	}
	defer rows.Close()
	for rows.Next() {
		var s State
		var count int
		if err := rows.Scan(&s, &count); err != nil {
			return nil, b.failed(ctx, "counting jobs", err)
		}
		n[s] = count
	}
	return n, rows.Err()
}
