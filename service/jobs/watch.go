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
		j, news, err := b.nextLook(ctx, id, since, look.C)
		if news || err != nil {
			return j, err
		}
	}
}

// nextLook returns the job if there is news of it, else waits until it may have changed.
func (b *Board) nextLook(ctx context.Context, id string, since int64, look <-chan time.Time) (j Job, news bool, err error) {
	c := b.watch(id) // before the look, so that no change is missed
	defer b.unwatch(id, c)
	j, err = b.Get(ctx, id)
	if err != nil || j.Sequence > since || j.State.Ended() {
		return j, true, err
	}
	select {
	case <-ctx.Done():
		return j, false, context.Cause(ctx)
	case <-c.told:
	case <-look:
	}
	return j, false, nil
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

// change is the next change of a job in this process.
type change struct {
	told     chan struct{} // closed when it happens
	watchers int
}

func (b *Board) watch(id string) *change {
	b.mutex.Lock()
	defer b.mutex.Unlock()
	c := b.watched[id]
	if c == nil {
		c = &change{told: make(chan struct{})}
		b.watched[id] = c
	}
	c.watchers++
	return c
}

// unwatch forgets the job when nobody watches it any more.
func (b *Board) unwatch(id string, c *change) {
	b.mutex.Lock()
	defer b.mutex.Unlock()
	if c.watchers--; c.watchers == 0 && b.watched[id] == c {
		delete(b.watched, id)
	}
}

// tell wakes whoever watches the job.
func (b *Board) tell(id string) {
	b.mutex.Lock()
	defer b.mutex.Unlock()
	if c := b.watched[id]; c != nil {
		close(c.told)
		delete(b.watched, id)
	}
}
