package service

import (
	"context"
	"errors"
	"sync/atomic"
	"time"
)

// ErrBusy tells that a lane's slots are taken and its queue is full or did not
// move in time. The same call can succeed later.
var ErrBusy = errors.New("service: busy")

// laneKind keeps kinds of work from each other: each has slots of its own.
type laneKind uint8

const (
	interactive laneKind = iota // short work
	bulk                        // long work that a caller waits for
	deferred                    // that of jobs
	laneCount
)

// lane is a number of slots with a bounded queue before them.
type lane struct {
	slots   chan struct{}
	waiting atomic.Int64
	refused atomic.Int64
	queue   int64
	wait    time.Duration
}

func newLane(slots, queue int, wait time.Duration) *lane {
	return &lane{slots: make(chan struct{}, slots), queue: int64(queue), wait: wait}
}

// enter takes a slot, or waits for one as long as the queue allows.
func (l *lane) enter(ctx context.Context) error {
	if err := context.Cause(ctx); err != nil {
		return err
	}
	select {
	case l.slots <- struct{}{}:
		return nil
	default:
	}
	if l.waiting.Add(1) > l.queue {
		l.waiting.Add(-1)
		l.refused.Add(1)
		return ErrBusy
	}
	defer l.waiting.Add(-1)
	patience := time.NewTimer(l.wait)
	defer patience.Stop()
	select {
	case l.slots <- struct{}{}:
		return nil
	case <-patience.C:
		l.refused.Add(1)
		return ErrBusy
	case <-ctx.Done():
		return context.Cause(ctx)
	}
}

func (l *lane) leave() { <-l.slots }

// run calls work in a slot of the lane; long work of a job in that of jobs, so that a
// night's jobs leave the slots to callers that wait.
func (s *Service) run(ctx context.Context, kind laneKind, work func() error) error {
	if kind == bulk && metered(ctx) {
		kind = deferred
	}
	l := s.lanes[kind]
	if err := l.enter(ctx); err != nil {
		return err
	}
	defer l.leave()
	if kind == interactive {
		defer s.cores.hasten()()
	}
	return work()
}

// turns returns what the workers of a lane take turns on: nothing for those of short
// work.
func (s *Service) turns(kind laneKind) *cores {
	if kind == bulk {
		return s.cores
	}
	return nil
}
