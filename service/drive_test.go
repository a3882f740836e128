package service

import (
	"context"
	"errors"
	"sync/atomic"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/calc/corners"
)

// drill is a job of one work with numbered tasks.
type drill struct {
	n    int
	task func(k, worker int)
	done bool
}

func (d *drill) Next() corners.Work {
	if d.done {
		return nil
	}
	d.done = true
	return d
}
func (d *drill) Tasks() int                         { return d.n }
func (d *drill) Run(k, worker int, _ corners.Model) { d.task(k, worker) }

func driverOf(ctx context.Context, workers int, m *Meter) *driver {
	return &driver{ctx: ctx, models: make([]corners.Model, workers), meter: m}
}

func TestEveryTaskRunsOnceAndOneAtATimePerWorker(t *testing.T) {
	for _, workers := range []int{1, 2, 7} {
		const n = 1000
		var ran [n]atomic.Int32
		var busy [7]atomic.Int32
		m := new(Meter)
		m.Expect(5000)
		require.NoError(t, driverOf(t.Context(), workers, m).do(&drill{n: n, task: func(k, worker int) {
			require.EqualValues(t, 1, busy[worker].Add(1))
			ran[k].Add(1)
			busy[worker].Add(-1)
		}}, 3, 5000))
		for k := range ran {
			require.EqualValues(t, 1, ran[k].Load())
		}
		done, expected := m.Progress()
		require.Equal(t, expected, done, "the whole budget is seen at the end")
	}
}

func TestProgressNeverPassesTheBudget(t *testing.T) {
	m := new(Meter)
	m.Expect(100)
	require.NoError(t, driverOf(t.Context(), 2, m).do(&drill{n: 64, task: func(int, int) {}}, 32, 100))
	done, expected := m.Progress()
	require.EqualValues(t, 100, done)
	require.EqualValues(t, 100, expected)
}

func TestDriverStopsWithItsContext(t *testing.T) {
	ctx, cancel := context.WithCancelCause(t.Context())
	gone := errors.New("gone")
	var ran atomic.Int32
	err := driverOf(ctx, 2, new(Meter)).do(&drill{n: 1 << 20, task: func(int, int) {
		if ran.Add(1) == 10 {
			cancel(gone)
		}
	}}, 1, 1)
	require.ErrorIs(t, err, gone)
	require.Less(t, ran.Load(), int32(20))
}

// A fault of ours in a worker reaches the caller, who can answer it; it does not
// end the process.
func TestAPanicInAWorkerReachesTheCaller(t *testing.T) {
	for _, workers := range []int{1, 3} {
		require.Panics(t, func() {
			_ = driverOf(t.Context(), workers, new(Meter)).do(&drill{n: 100, task: func(k, _ int) {
				if k == 50 {
					panic("corners: a bug")
				}
			}}, 1, 1)
		})
	}
}
