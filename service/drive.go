package service

import (
	"context"
	"sync/atomic"

	"railproof/calc/corners"
)

// driver does the jobs of one analysis on its models, one goroutine for each.
type driver struct {
	ctx    context.Context
	turns  *cores // nil: every worker computes whenever it can
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

// tasks runs every task of a work. Each, below a millisecond, is a turn; between them
// it looks at the context.
func (d *driver) tasks(work corners.Work, done func()) error {
	var next atomic.Int64
	n := work.Tasks()
	return onWorkers(min(len(d.models), n), func(worker int) error {
		defer next.Add(int64(n)) // whoever leaves before the end, by an error or a panic, ends it for all
		d.turns.take()
		defer d.turns.give()
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
			d.turns.next()
		}
	})
}
