package service

import (
	"context"
	"errors"
	"fmt"
	"runtime"
	"runtime/debug"
	"sync"
	"sync/atomic"

	"railproof/calc/corners"
)

// driver does the jobs of one analysis on its models, one goroutine for each.
type driver struct {
	ctx    context.Context
	models []corners.Model
	meter  *Meter
}

// do runs a job to its end or to the context's. budget is the number of
// evaluations that the meter was told to expect of it, perTask how many a task is
// taken for; the meter has seen the whole budget when the job ends.
func (d *driver) do(job corners.Job, perTask, budget int) error {
	var counted atomic.Int64
	count := func(n int) {
		if over := counted.Add(int64(n)) - int64(budget); over > 0 {
			n -= min(n, int(over))
		}
		d.meter.Add(n)
	}
	for work := job.Next(); work != nil; work = job.Next() {
		if err := d.tasks(work, func() { count(perTask) }); err != nil {
			return err
		}
	}
	if left := budget - int(counted.Load()); left > 0 {
		d.meter.Add(left)
	}
	return nil
}

// tasks runs every task of a work. Between tasks, each below a millisecond, it
// looks at the context and lets others run.
func (d *driver) tasks(work corners.Work, done func()) error {
	var next atomic.Int64
	n := work.Tasks()
	loop := func(worker int) error {
		for {
			if err := context.Cause(d.ctx); err != nil {
				return err
			}
			task := int(next.Add(1)) - 1
			if task >= n {
				return nil
			}
			work.Run(task, worker, d.models[worker])
			done()
			runtime.Gosched()
		}
	}
	workers := min(len(d.models), n)
	if workers <= 1 {
		return loop(0)
	}
	failed := make([]error, workers)
	var all sync.WaitGroup
	for i := range workers {
		all.Go(func() {
			defer func() {
				if r := recover(); r != nil {
					next.Add(int64(n))
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
