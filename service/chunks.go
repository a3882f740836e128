package service

import (
	"context"
	"runtime"
	"sync"
	"sync/atomic"
)

// inChunks calls work for the whole range 0..n in chunks of a fixed size, on the
// given number of workers. Which worker takes a chunk does not matter, because
// work stores by index; so any number of workers gives the same result. Between
// chunks it looks at the context and lets others run. prepare makes a worker's
// own workspace, release gives it back.
func inChunks[W any](ctx context.Context, n, size, workers int, prepare func() W, release func(W), work func(w W, from, to int)) error {
	var next atomic.Int64
	loop := func() error {
		space := prepare()
		defer release(space)
		for {
			if err := context.Cause(ctx); err != nil {
				return err
			}
			from := int(next.Add(int64(size))) - size
			if from >= n {
				return nil
			}
			work(space, from, min(from+size, n))
			runtime.Gosched()
		}
	}
	workers = min(workers, (n+size-1)/size)
	if workers <= 1 {
		return loop()
	}
	failed := make([]error, workers)
	var all sync.WaitGroup
	for i := range workers {
		all.Go(func() { failed[i] = loop() })
	}
	all.Wait()
	for _, err := range failed {
		if err != nil {
			return err
		}
	}
	return nil
}

// polled goes through a computation that yields every few milliseconds. Between
// its pieces it looks at the context and lets others run.
func polled(ctx context.Context, pieces func(yield func() bool)) error {
	for range pieces {
		if err := context.Cause(ctx); err != nil {
			return err
		}
		runtime.Gosched()
	}
	return nil
}
