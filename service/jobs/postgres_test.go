//go:build e2e

package jobs

import (
	"context"
	"fmt"
	"sync/atomic"
	"testing"
	"time"

	"github.com/stretchr/testify/require"

	"railproof/service"
	"railproof/tests/cluster"
)

var databases atomic.Int64

// fresh makes a database of its own in the cluster.
func fresh(c *cluster.Cluster) place {
	name := fmt.Sprintf("test%d", databases.Add(1))
	c.Execute("CREATE DATABASE " + name)
	return place{dsn: c.DSN + "&dbname=" + name}
}

func TestPostgreSQL(t *testing.T) {
	c := cluster.Start(t)
	everywhere(t, func(*testing.T) place { return fresh(c) })

	t.Run("many processes that start at once migrate once", func(t *testing.T) {
		p := fresh(c)
		opened := make(chan error, 6)
		for range cap(opened) {
			go func() {
				b, err := Open(t.Context(), Options{Executor: new(fakeExecutor), Engine: "test", DSN: p.dsn})
				if err == nil {
					err = b.Close(t.Context())
				}
				opened <- err
			}()
		}
		for range cap(opened) {
			require.NoError(t, <-opened)
		}
	})

	t.Run("another process cancels within 200 ms", func(t *testing.T) {
		p := fresh(c)
		f := new(fakeExecutor)
		worker := p.open(t, f, nil)
		j := submit(t, worker, work{Steps: 10_000, Step: 10 * time.Millisecond, Name: "a"})
		awaitRunning(t, worker, j.ID)
		other := p.open(t, new(fakeExecutor), func(o *Options) { o.Engine = "other" })
		before := time.Now()
		_, err := other.Cancel(t.Context(), j.ID)
		require.NoError(t, err)
		require.Eventually(t, func() bool { return f.stopped.Load() == 1 }, 200*time.Millisecond, time.Millisecond)
		t.Logf("stopped after %v", time.Since(before))
	})

	t.Run("parts are shared and merge to the same bytes", func(t *testing.T) {
		p := fresh(c)
		f, g := new(fakeExecutor), new(fakeExecutor)
		a := p.open(t, f, func(o *Options) { o.Workers = 1 }) // which is busy with the job
		b := p.open(t, g, nil)
		w := work{Steps: 201, Step: 15 * time.Millisecond, Parts: 20, Name: "a"} // alone it takes 3 s; a process that is called by nobody looks every second
		j := await(t, a, submit(t, a, w).ID, Done)
		require.EqualValues(t, 201, j.Done)
		got, err := b.Result(t.Context(), "res_a")
		require.NoError(t, err)
		require.Equal(t, answerOf(w), got.Body)
		require.Positive(t, g.parts.Load(), "the other process helped")
		require.Positive(t, f.parts.Load())
		require.EqualValues(t, 20, f.parts.Load()+g.parts.Load())
		t.Logf("parts: %d here, %d there", f.parts.Load(), g.parts.Load())
	})

	t.Run("a part that fails makes the job fail with the whole's problem", func(t *testing.T) {
		b := fresh(c).open(t, new(fakeExecutor), nil)
		j := await(t, b, submit(t, b, work{Steps: 10, Parts: 3, Fail: true, Name: "a"}).ID, Failed)
		require.JSONEq(t, `{"title":"asked to fail"}`, string(j.Problem))
	})

	t.Run("the database goes and comes back", func(t *testing.T) {
		f := new(fakeExecutor)
		b := fresh(c).open(t, f, nil)
		w := work{Steps: 40, Step: 50 * time.Millisecond, Name: "a"}
		j := submit(t, b, w)
		awaitRunning(t, b, j.ID)
		c.Kill()
		_, err := b.Get(t.Context(), j.ID)
		require.ErrorIs(t, err, ErrStorage)
		require.NotEmpty(t, b.Trouble())
		time.Sleep(3 * time.Second) // the work ends meanwhile and cannot be stored
		c.Resume()
		back := time.Now()
		require.Eventually(t, func() bool {
			got, err := b.Get(t.Context(), j.ID)
			return err == nil && got.State == Done
		}, 30*time.Second, 20*time.Millisecond)
		t.Logf("stored %v after the database was back", time.Since(back))
		require.EqualValues(t, 1, f.executions.Load(), "what was computed was not computed again")
		await(t, b, submit(t, b, work{Steps: 1, Name: "b"}).ID, Done)
	})

	t.Run("parts that end while the database is away are kept", func(t *testing.T) {
		f := new(fakeExecutor)
		b := fresh(c).open(t, f, nil)
		w := work{Steps: 40, Step: 50 * time.Millisecond, Parts: 2, Name: "a"} // a second each
		j := submit(t, b, w)
		require.Eventually(t, func() bool { return f.parts.Load() == 2 }, 10*time.Second, time.Millisecond)
		c.Kill()
		time.Sleep(2 * time.Second)
		c.Resume()
		back := time.Now()
		require.Eventually(t, func() bool {
			got, err := b.Get(t.Context(), j.ID)
			return err == nil && got.State == Done
		}, 30*time.Second, 20*time.Millisecond)
		t.Logf("stored %v after the database was back", time.Since(back))
		require.EqualValues(t, 2, f.parts.Load(), "what was computed was not computed again")
	})

	t.Run("a jump of the clock takes nothing from another process", func(t *testing.T) {
		for _, jump := range []string{"+ 86400000", "- 86400000"} {
			p := fresh(c)
			f, g := new(fakeExecutor), new(fakeExecutor)
			worker := p.open(t, f, nil)
			j := submit(t, worker, work{Steps: 100, Step: 20 * time.Millisecond, Name: "a"})
			awaitRunning(t, worker, j.ID)
			other := p.open(t, g, nil)
			time.Sleep(sweepEvery / 4) // its first sweep is over, its next one not near
			clock := `(` + *other.db.clock.Load() + ` ` + jump + `)`
			other.db.shift(clock)
			require.NoError(t, other.sweepOnce(t.Context()), "before the next beat")
			worker.db.shift(clock)
			await(t, worker, j.ID, Done)
			require.EqualValues(t, 1, f.executions.Load())
			require.Zero(t, g.executions.Load())
			require.Zero(t, other.counts.TakenOver.Load())
		}
	})

	t.Run("parts that are not done in time fail with that problem", func(t *testing.T) {
		b := fresh(c).open(t, new(fakeExecutor), func(o *Options) { o.Deadline = 300 * time.Millisecond })
		j := await(t, b, submit(t, b, work{Steps: 1000, Step: 10 * time.Millisecond, Parts: 4, Name: "a"}).ID, Failed)
		require.JSONEq(t, `{"title":"stopped"}`, string(j.Problem))
	})

	t.Run("a look that fails takes no progress away", func(t *testing.T) {
		b := fresh(c).open(t, new(fakeExecutor), nil)
		_, err := b.db.exec(t.Context(), `ALTER TABLE railproof_parts RENAME TO gone`)
		require.NoError(t, err)
		r := &run{id: "job_a"}
		r.inParts.Store(5)
		ctx, stop := context.WithCancelCause(t.Context())
		ended := b.watchPart(ctx, stop, r, 0, new(service.Meter))
		time.Sleep(3 * partWatch)
		stop(nil)
		<-ended
		require.EqualValues(t, 5, r.inParts.Load())
	})

	t.Run("a process that stops beating loses its job to another", func(t *testing.T) {
		p := fresh(c)
		f := new(fakeExecutor)
		dead := p.open(t, f, nil)
		j := submit(t, dead, work{Steps: 10_000, Step: 10 * time.Millisecond, Name: "a"})
		awaitRunning(t, dead, j.ID)
		_, err := dead.db.exec(t.Context(), `UPDATE railproof_jobs SET request = $2, owner = 'process_gone', beat = beat - 11000 WHERE id = $1`, j.ID, request(work{Steps: 3, Step: time.Millisecond, Name: "a"}).Body)
		require.NoError(t, err)
		p.open(t, new(fakeExecutor), nil)
		await(t, dead, j.ID, Done)
	})
}
