package service

import (
	"context"
	"errors"
	"fmt"
	"runtime/debug"
	"sync"
	"sync/atomic"
)

// inChunks calls work for the whole range 0..n in chunks of a fixed size, on the
// given number of workers. Which worker takes a chunk does not matter, because
// work stores by index; so any number of workers gives the same result. Each chunk is
// a turn; between them it looks at the context. prepare makes a worker's own
// workspace, release gives it back.
func inChunks[W any](ctx context.Context, turns *cores, n, size, workers int, prepare func() W, release func(W), work func(w W, from, to int)) error {
	var next atomic.Int64
	return onWorkers(min(workers, (n+size-1)/size), func(int) error {
		space := prepare()
		defer release(space)
		turns.take()
		defer turns.give()
		for {
			if err := context.Cause(ctx); err != nil {
				return err
			}
			from := int(next.Add(int64(size))) - size
			if from >= n {
				return nil
			}
			work(space, from, min(from+size, n))
			turns.next()
		}
	})
}

// polled goes through a computation that yields every few milliseconds. Each of its
// pieces is a turn; between them it looks at the context.
func polled(ctx context.Context, turns *cores, pieces func(yield func() bool)) error {
	turns.take()
	defer turns.give()
	for range pieces {
		if err := context.Cause(ctx); err != nil {
			return err
		}
		turns.next()
	}
	return nil
}

// onWorkers calls loop once for each worker, at the same time, and returns the first
// error in their order. A panic reaches the caller, who can answer it; it does not end
// the process.
func onWorkers(workers int, loop func(worker int) error) error {
	if workers <= 1 {
		return loop(0)
	}
	failed := make([]error, workers)
	var all sync.WaitGroup
	for i := range workers {
		all.Go(func() {
			defer func() {
				if r := recover(); r != nil {
					failed[i] = &crash{r, debug.Stack()}
				}
			}()
			failed[i] = loop(i)
		})
	}
	all.Wait()
	for _, err := range failed {
		if c, ok := errors.AsType[*crash](err); ok {
			panic(c) // on the caller's goroutine, where the transport catches it
		}
	}
	for _, err := range failed {
		if err != nil {
			return err
		}
	}
	return nil
}

// crash carries a panic from a worker to its caller.
type crash struct {
	cause any
	stack []byte
}

func (c *crash) Error() string { return fmt.Sprintf("%v\n%s", c.cause, c.stack) }
