package jobs

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"sync"
	"sync/atomic"
	"testing"
	"time"

	"github.com/stretchr/testify/require"

	"railproof/service"
	"railproof/service/results"
)

// work is what the fake executor does: a number of steps of a length, then the
// answer.
type work struct {
	Steps int           `json:"steps"`
	Step  time.Duration `json:"step"`
	Parts int           `json:"parts"`
	Fail  bool          `json:"fail"`
	Name  string        `json:"name"`
}

type fakeExecutor struct {
	executions atomic.Int64
	parts      atomic.Int64
	stopped    atomic.Int64
	busy       atomic.Int64 // so often it says that no slot is free
}

func (f *fakeExecutor) steps(ctx context.Context, n int, each time.Duration, m *service.Meter) error {
	for range n {
		select {
		case <-ctx.Done():
			f.stopped.Add(1)
			return context.Cause(ctx)
		case <-time.After(each):
			m.Add(1)
		}
	}
	return nil
}

func answerOf(w work) []byte { return fmt.Appendf(nil, `{"name":%q,"steps":%d}`, w.Name, w.Steps) }

func (f *fakeExecutor) Execute(ctx context.Context, _ string, request []byte, m *service.Meter) Outcome {
	if ctx.Err() != nil {
		return Outcome{Problem: []byte(`{"title":"stopped"}`)}
	}
	if f.busy.Add(-1) >= 0 {
		return Outcome{Busy: true}
	}
	f.executions.Add(1)
	w := read(request)
	m.Expect(w.Steps)
	if err := f.steps(ctx, w.Steps, w.Step, m); err != nil {
		return Outcome{Problem: []byte(`{"title":"stopped"}`)}
	}
	if w.Fail {
		return Outcome{Problem: []byte(`{"title":"asked to fail"}`)}
	}
	return Outcome{ResultID: "res_" + w.Name, Answer: results.Answer{Media: "application/json", Body: answerOf(w)}}
}

func (f *fakeExecutor) Parts(_ string, request []byte) (parts, evaluations int) {
	w := read(request)
	return w.Parts, w.Steps
}

func (f *fakeExecutor) Part(ctx context.Context, _ string, request []byte, part, parts int, m *service.Meter) ([]byte, error) {
	f.parts.Add(1)
	w := read(request)
	if w.Fail {
		return nil, errors.New("asked to fail")
	}
	n := w.Steps*(part+1)/parts - w.Steps*part/parts
	return fmt.Appendf(nil, "%d", n), f.steps(ctx, n, w.Step, m)
}

func (f *fakeExecutor) Merge(_ context.Context, _ string, request []byte, parts [][]byte) Outcome {
	w := read(request)
	sum := 0
	for _, p := range parts {
		var n int
		if _, err := fmt.Sscan(string(p), &n); err != nil {
			panic(err)
		}
		sum += n
	}
	w.Steps = sum
	return Outcome{ResultID: "res_" + w.Name, Answer: results.Answer{Media: "application/json", Body: answerOf(w)}}
}

func read(request []byte) (w work) {
	if err := json.Unmarshal(request, &w); err != nil {
		panic(err)
	}
	return w
}

func request(w work) Request {
	b, err := json.Marshal(w)
	if err != nil {
		panic(err)
	}
	return Request{Operation: "corners", ResultID: "res_" + w.Name, Body: b}
}

// place is a database that a test opens again and again.
type place struct{ dsn, directory string }

func (p place) open(t *testing.T, f *fakeExecutor, change func(*Options)) *Board {
	t.Helper()
	o := Options{Executor: f, Engine: "test", DSN: p.dsn, Directory: p.directory}
	if change != nil {
		change(&o)
	}
	b, err := Open(t.Context(), o)
	require.NoError(t, err)
	var once sync.Once
	t.Cleanup(func() { once.Do(func() { shut(b) }) })
	return b
}

func shut(b *Board) {
	ctx, cancel := context.WithTimeout(context.Background(), 50*time.Millisecond)
	defer cancel()
	_ = b.Close(ctx)
}

func submit(t *testing.T, b *Board, w work) Job {
	t.Helper()
	j, existing, err := b.Submit(t.Context(), request(w))
	require.NoError(t, err)
	require.False(t, existing)
	return j
}

func await(t *testing.T, b *Board, id string, s State) Job {
	t.Helper()
	j, err := b.Wait(t.Context(), id, 20*time.Second)
	require.NoError(t, err)
	require.Equal(t, s, j.State, "%+v", j)
	return j
}

func awaitRunning(t *testing.T, b *Board, id string) {
	t.Helper()
	require.Eventually(t, func() bool {
		j, err := b.Get(t.Context(), id)
		return err == nil && j.State == Running
	}, 10*time.Second, 5*time.Millisecond)
}

// stored puts a job into the database and no message into the queue.
func stored(t *testing.T, b *Board, id string, state State, w work) {
	t.Helper()
	_, err := b.db.exec(t.Context(), `INSERT INTO railproof_jobs (id, engine, operation, request_key, result_id, request, state, sequence, claims, deaths, owner, beat, queued, done, expected, created, started, ended)
		VALUES ($1, $2, 'corners', $3, $3, $4, $5, 1, 0, 0, '', 0, NOW(), 0, 0, NOW(), 0, 0)`, id, b.o.Engine, "res_"+w.Name, request(w).Body, string(state))
	require.NoError(t, err)
}

// everywhere holds what both databases must do. where gives each test its own.
func everywhere(t *testing.T, where func(t *testing.T) place) {
	t.Run("a job runs and its result is kept", func(t *testing.T) {
		f := new(fakeExecutor)
		b := where(t).open(t, f, nil)
		w := work{Steps: 3, Step: time.Millisecond, Name: "a"}
		j := await(t, b, submit(t, b, w).ID, Done)
		require.Equal(t, 1.0, j.Fraction())
		require.EqualValues(t, 3, j.Done)
		require.False(t, j.Ended.Before(j.Created))
		got, err := b.Result(t.Context(), j.ResultID)
		require.NoError(t, err)
		require.Equal(t, answerOf(w), got.Body)
		_, err = b.Result(t.Context(), "res_b")
		require.ErrorIs(t, err, ErrUnknown)
		_, err = b.Get(t.Context(), "job_b")
		require.ErrorIs(t, err, ErrUnknown)
		require.Empty(t, b.Trouble())
	})
	t.Run("the same request is the same job, unless that failed", func(t *testing.T) {
		f := new(fakeExecutor)
		b := where(t).open(t, f, nil)
		first := submit(t, b, work{Steps: 1, Name: "a"})
		again, existing, err := b.Submit(t.Context(), request(work{Steps: 1, Name: "a"}))
		require.NoError(t, err)
		require.True(t, existing)
		require.Equal(t, first.ID, again.ID)
		await(t, b, first.ID, Done)
		again, existing, err = b.Submit(t.Context(), request(work{Steps: 1, Name: "a"}))
		require.NoError(t, err)
		require.True(t, existing)
		require.Equal(t, first.ID, again.ID)
		failing := work{Steps: 1, Fail: true, Name: "b"}
		j := await(t, b, submit(t, b, failing).ID, Failed)
		require.JSONEq(t, `{"title":"asked to fail"}`, string(j.Problem))
		require.NotEqual(t, j.ID, submit(t, b, failing).ID)
	})
	t.Run("a message that a late process takes is not lost", func(t *testing.T) {
		// The process slept, another one made its job wait again, and the message for
		// that reaches it before it has seen so.
		b := where(t).open(t, new(fakeExecutor), nil)
		late := &run{id: "job_late"}
		b.mutex.Lock()
		b.running[late.id] = late
		b.mutex.Unlock()
		defer b.forget(late)
		stored(t, b, "job_late", "waiting", work{Name: "late"})
		_, err := b.db.exec(t.Context(), `UPDATE railproof_jobs SET engine = 'one that sweeps nothing here'`)
		require.NoError(t, err)
		require.False(t, b.claim(t.Context(), &run{id: "job_late"}))
		var queued int64
		require.NoError(t, b.db.row(t.Context(), `SELECT queued FROM railproof_jobs WHERE id = 'job_late'`).Scan(&queued))
		require.Zero(t, queued, "the next sweep queues it")
	})
	t.Run("a message that is lost is missed", func(t *testing.T) {
		b := where(t).open(t, new(fakeExecutor), func(o *Options) { o.Workers = 1 })
		stored(t, b, "job_lost", "waiting", work{Steps: 1, Name: "lost"})
		_, err := b.db.exec(t.Context(), `UPDATE railproof_jobs SET queued = NOW() - 11000 WHERE id = 'job_lost'`)
		require.NoError(t, err)
		await(t, b, "job_lost", Done)
	})
	t.Run("a full queue is not taken for a loss of messages", func(t *testing.T) {
		b := where(t).open(t, new(fakeExecutor), func(o *Options) { o.Workers = 1 })
		awaitRunning(t, b, submit(t, b, work{Steps: 10_000, Step: 10 * time.Millisecond, Name: "long"}).ID)
		submit(t, b, work{Name: "a"})
		messages := func() (n int) {
			require.NoError(t, b.db.row(t.Context(), `SELECT COUNT(*) FROM river_job`).Scan(&n))
			return n
		}
		before := messages()
		_, err := b.db.exec(t.Context(), `UPDATE railproof_jobs SET queued = NOW() - 11000 WHERE state = 'waiting'`)
		require.NoError(t, err)
		require.NoError(t, b.sweepOnce(t.Context()))
		require.Equal(t, before, messages())
	})
	t.Run("an answer ends the job whoever has it, a problem only that of its process", func(t *testing.T) {
		b := where(t).open(t, new(fakeExecutor), nil)
		problem := Outcome{Problem: []byte(`{"title":"the time is over"}`)}
		answer := Outcome{ResultID: "res_a", Answer: results.Answer{Media: "application/json", Body: []byte("{}")}}
		late := &run{id: "job_a", operation: "corners", meter: new(service.Meter)}
		kept := func(o Outcome) bool {
			kept, err := b.store(late, o)
			require.NoError(t, err)
			return kept
		}
		stored(t, b, "job_a", "waiting", work{Name: "a"})
		require.False(t, kept(problem), "it waits for another process")
		_, err := b.db.exec(t.Context(), `UPDATE railproof_jobs SET state = 'running', owner = 'process_other', beat = NOW()`)
		require.NoError(t, err)
		require.False(t, kept(problem), "another process has it")
		require.True(t, kept(answer))
		require.False(t, kept(answer), "once")
		j, err := b.Get(t.Context(), "job_a")
		require.NoError(t, err)
		require.Equal(t, Done, j.State)
		stored(t, b, "job_b", "cancelled", work{Name: "b"})
		late.id, answer.ResultID = "job_b", "res_b"
		require.False(t, kept(answer))
		_, err = b.Result(t.Context(), "res_b")
		require.ErrorIs(t, err, ErrUnknown, "and nothing is left of it")
	})
	t.Run("a job that cannot begin in its time fails with that problem", func(t *testing.T) {
		f := new(fakeExecutor)
		f.busy.Store(1 << 30)
		b := where(t).open(t, f, func(o *Options) { o.Deadline = 300 * time.Millisecond })
		j := await(t, b, submit(t, b, work{Steps: 1, Name: "a"}).ID, Failed)
		require.JSONEq(t, `{"title":"stopped"}`, string(j.Problem))
	})
	t.Run("nobody who has looked at a job is remembered", func(t *testing.T) {
		b := where(t).open(t, new(fakeExecutor), nil)
		j := await(t, b, submit(t, b, work{Steps: 1, Name: "a"}).ID, Done)
		_, err := b.Next(t.Context(), j.ID, 0)
		require.NoError(t, err)
		waiting := submit(t, b, work{Steps: 1000, Step: 10 * time.Millisecond, Name: "b"})
		_, err = b.Wait(t.Context(), waiting.ID, 20*time.Millisecond)
		require.NoError(t, err)
		require.Empty(t, b.watched)
	})
	t.Run("many callers of one request get one job", func(t *testing.T) {
		f := new(fakeExecutor)
		b := where(t).open(t, f, nil)
		ids := make([]string, 16)
		var all sync.WaitGroup
		for i := range ids {
			all.Go(func() {
				j, _, err := b.Submit(t.Context(), request(work{Steps: 1, Name: "a"}))
				if err == nil {
					ids[i] = j.ID
				}
			})
		}
		all.Wait()
		for _, id := range ids {
			require.Equal(t, ids[0], id)
		}
		await(t, b, ids[0], Done)
		require.EqualValues(t, 1, f.executions.Load())
	})
	t.Run("cancelling stops the work within 200 ms", func(t *testing.T) {
		f := new(fakeExecutor)
		p := where(t)
		b := p.open(t, f, nil)
		j := submit(t, b, work{Steps: 1000, Step: 10 * time.Millisecond, Name: "a"})
		awaitRunning(t, b, j.ID)
		before := time.Now()
		got, err := b.Cancel(t.Context(), j.ID)
		require.NoError(t, err)
		require.Equal(t, Cancelled, got.State)
		require.Eventually(t, func() bool { return f.stopped.Load() == 1 }, 200*time.Millisecond, time.Millisecond)
		t.Logf("stopped after %v", time.Since(before))
		got, err = b.Cancel(t.Context(), j.ID)
		require.NoError(t, err, "again is fine")
		require.Equal(t, Cancelled, got.State)
		done := await(t, b, submit(t, b, work{Steps: 1, Name: "b"}).ID, Done)
		_, err = b.Cancel(t.Context(), done.ID)
		require.ErrorIs(t, err, ErrEnded)
	})
	t.Run("jobs are listed newest first, in pages", func(t *testing.T) {
		f := new(fakeExecutor)
		b := where(t).open(t, f, nil)
		var want []string
		for i := range 7 {
			want = append([]string{submit(t, b, work{Steps: 1, Name: fmt.Sprint(i)}).ID}, want...)
			time.Sleep(2 * time.Millisecond) // identifiers of one millisecond have no order
		}
		var got []string
		cursor := ""
		for pages := 1; ; pages++ {
			list, next, err := b.List(t.Context(), cursor, 3)
			require.NoError(t, err)
			for _, j := range list {
				got = append(got, j.ID)
			}
			if next == "" {
				require.Equal(t, 3, pages)
				break
			}
			cursor = next
		}
		require.Equal(t, want, got)
		_, _, err := b.List(t.Context(), "anything", 3)
		require.ErrorIs(t, err, ErrCursor)
	})
	t.Run("more than may wait is refused", func(t *testing.T) {
		f := new(fakeExecutor)
		b := where(t).open(t, f, func(o *Options) { o.Workers, o.Waiting = 1, 2 })
		awaitRunning(t, b, submit(t, b, work{Steps: 1000, Step: 10 * time.Millisecond, Name: "long"}).ID)
		submit(t, b, work{Name: "a"})
		submit(t, b, work{Name: "b"})
		_, _, err := b.Submit(t.Context(), request(work{Name: "c"}))
		require.ErrorIs(t, err, ErrFull)
	})
	t.Run("watchers see every state, in order", func(t *testing.T) {
		f := new(fakeExecutor)
		b := where(t).open(t, f, nil)
		j := submit(t, b, work{Steps: 100, Step: 10 * time.Millisecond, Name: "a"})
		var seen []State
		last, fraction := int64(0), 0.0
		for {
			got, err := b.Next(t.Context(), j.ID, last)
			require.NoError(t, err)
			require.Greater(t, got.Sequence, last)
			require.GreaterOrEqual(t, got.Fraction(), fraction)
			last, fraction = got.Sequence, got.Fraction()
			if len(seen) == 0 || seen[len(seen)-1] != got.State {
				seen = append(seen, got.State)
			}
			if got.State.Ended() {
				break
			}
		}
		require.Subset(t, []State{Waiting, Running, Done}, seen)
		require.Contains(t, seen, Running)
		require.Equal(t, Done, seen[len(seen)-1])
	})
	t.Run("what runs when the process ends is given back and done by the next", func(t *testing.T) {
		f := new(fakeExecutor)
		p := where(t)
		b := p.open(t, f, nil)
		w := work{Steps: 200, Step: 5 * time.Millisecond, Name: "a"}
		j := submit(t, b, w)
		awaitRunning(t, b, j.ID)
		before := time.Now()
		shut(b)
		t.Logf("closed after %v", time.Since(before))
		b = p.open(t, new(fakeExecutor), nil)
		await(t, b, j.ID, Done)
		got, err := b.Result(t.Context(), "res_a")
		require.NoError(t, err)
		require.Equal(t, answerOf(w), got.Body)
	})
	t.Run("without a free slot a job waits", func(t *testing.T) {
		f := new(fakeExecutor)
		f.busy.Store(3)
		b := where(t).open(t, f, nil)
		await(t, b, submit(t, b, work{Steps: 1, Name: "a"}).ID, Done)
	})
	t.Run("a job over which processes keep dying is given up", func(t *testing.T) {
		f := new(fakeExecutor)
		b := where(t).open(t, f, func(o *Options) { o.Workers = 1 })
		awaitRunning(t, b, submit(t, b, work{Steps: 10_000, Step: 10 * time.Millisecond, Name: "long"}).ID)
		j := submit(t, b, work{Name: "a"})
		_, err := b.db.exec(t.Context(), `UPDATE railproof_jobs SET deaths = 3 WHERE id = $1`, j.ID)
		require.NoError(t, err)
		await(t, b, j.ID, Failed)
	})
	t.Run("what is too old or too large is dropped", func(t *testing.T) {
		f := new(fakeExecutor)
		b := where(t).open(t, f, func(o *Options) { o.KeepBytes = int64(len(answerOf(work{Steps: 1, Name: "0"}))) * 2 })
		var ids []string
		for i := range 4 {
			ids = append(ids, await(t, b, submit(t, b, work{Steps: 1, Name: fmt.Sprint(i)}).ID, Done).ID)
			time.Sleep(5 * time.Millisecond)
		}
		_, err := b.db.exec(t.Context(), `ALTER TABLE railproof_parts RENAME TO gone`)
		require.NoError(t, err)
		require.Error(t, b.tidy(t.Context()))
		_, err = b.Result(t.Context(), "res_0")
		require.NoError(t, err, "a result goes together with its job or not at all")
		_, err = b.db.exec(t.Context(), `ALTER TABLE gone RENAME TO railproof_parts`)
		require.NoError(t, err)
		require.NoError(t, b.tidy(t.Context()))
		for i, id := range ids {
			_, err := b.Get(t.Context(), id)
			_, lost := b.Result(t.Context(), fmt.Sprintf("res_%d", i))
			if i < 2 {
				require.ErrorIs(t, err, ErrUnknown)
				require.ErrorIs(t, lost, ErrUnknown)
			} else {
				require.NoError(t, err)
				require.NoError(t, lost)
			}
		}
		_, err = b.db.exec(t.Context(), `UPDATE railproof_jobs SET ended = ended - $1`, b.o.KeepFor.Milliseconds()+1)
		require.NoError(t, err)
		require.NoError(t, b.tidy(t.Context()))
		list, _, err := b.List(t.Context(), "", 10)
		require.NoError(t, err)
		require.Empty(t, list)
	})
	t.Run("jobs of an engine that is gone are run by the present one", func(t *testing.T) {
		p := where(t)
		b := p.open(t, new(fakeExecutor), func(o *Options) { o.Workers = 1 })
		awaitRunning(t, b, submit(t, b, work{Steps: 10_000, Step: 10 * time.Millisecond, Name: "long"}).ID)
		j := submit(t, b, work{Steps: 1, Name: "a"})
		shut(b)
		b = p.open(t, new(fakeExecutor), func(o *Options) { o.Engine = "other" })
		require.NoError(t, b.adopt(t.Context(), 0))
		await(t, b, j.ID, Done)
	})
	t.Run("a jump of the clock ends and repeats nothing", func(t *testing.T) {
		for _, jump := range []string{"+ 86400000", "- 86400000"} {
			f := new(fakeExecutor)
			b := where(t).open(t, f, nil)
			j := submit(t, b, work{Steps: 60, Step: 20 * time.Millisecond, Name: "a"})
			awaitRunning(t, b, j.ID)
			b.db.shift(`(` + *b.db.clock.Load() + ` ` + jump + `)`)
			require.NoError(t, b.sweepOnce(t.Context()))
			await(t, b, j.ID, Done)
			require.EqualValues(t, 1, f.executions.Load())
			require.NoError(t, b.tidy(t.Context()))
		}
	})
	t.Run("the text of the database's failures stays inside", func(t *testing.T) {
		b := where(t).open(t, new(fakeExecutor), nil)
		_, err := b.db.exec(t.Context(), `ALTER TABLE railproof_jobs RENAME TO gone`)
		require.NoError(t, err)
		_, err = b.Get(t.Context(), "job_a")
		require.ErrorIs(t, err, ErrStorage)
		require.NotEmpty(t, b.Trouble())
		_, err = b.db.exec(t.Context(), `ALTER TABLE gone RENAME TO railproof_jobs`)
		require.NoError(t, err)
		_, err = b.Get(t.Context(), "job_a")
		require.ErrorIs(t, err, ErrUnknown)
		require.Empty(t, b.Trouble())
	})
}
