package jobs

import (
	"context"
	"time"
)

// Next waits until a job has changed since the sequence, and returns it. One that
// has ended is returned at once.
func (b *Board) Next(ctx context.Context, id string, since int64) (Job, error) {
	look := time.NewTicker(2 * lookEvery)
	defer look.Stop()
	for {
		change := b.changes(id)
		j, err := b.Get(ctx, id)
		if err != nil || j.Sequence > since || j.State.Ended() {
			return j, err
		}
		select {
		case <-ctx.Done():
			return j, context.Cause(ctx)
		case <-change:
		case <-look.C:
		}
	}
}

// Wait waits until a job has ended, at most for the given time, and returns it as it
// stands then.
func (b *Board) Wait(ctx context.Context, id string, most time.Duration) (Job, error) {
	patience, cancel := context.WithTimeout(ctx, most)
	defer cancel()
	j, err := b.Get(ctx, id)
	for err == nil && !j.State.Ended() && patience.Err() == nil {
		j, err = b.Next(patience, id, j.Sequence)
	}
	if patience.Err() != nil && ctx.Err() == nil {
		return b.Get(ctx, id)
	}
	return j, err
}

// changes returns a channel that is closed when the job changes in this process.
func (b *Board) changes(id string) <-chan struct{} {
	b.mutex.Lock()
	defer b.mutex.Unlock()
	c := b.changed[id]
	if c == nil {
		c = make(chan struct{})
		b.changed[id] = c
	}
	return c
}

// tell wakes whoever watches the job.
func (b *Board) tell(id string) {
	b.mutex.Lock()
	defer b.mutex.Unlock()
	if c := b.changed[id]; c != nil {
		close(c)
		delete(b.changed, id)
	}
}
