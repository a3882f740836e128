package service

import (
	"context"
	"errors"
	"testing"
	"testing/synctest"
	"time"

	"github.com/stretchr/testify/require"
)

func TestInteractiveNeverWaitsForBulk(t *testing.T) {
	s := New(Options{Workers: 1})
	err := s.run(t.Context(), bulk, func() error {
		return s.run(t.Context(), interactive, func() error { return nil })
	})
	require.NoError(t, err)
}

// Jobs have slots of their own: however many run, a caller that waits gets one.
func TestJobsLeaveTheSlotsToCallers(t *testing.T) {
	s := New(Options{Workers: 1, Jobs: 1, QueueLength: 1, QueueWait: time.Millisecond})
	of := WithMeter(t.Context(), new(Meter))
	err := s.run(of, bulk, func() error {
		require.Empty(t, s.lanes[bulk].slots)
		return s.run(of, bulk, func() error {
			return s.run(t.Context(), bulk, func() error { return nil })
		})
	})
	require.NoError(t, err)
}

func TestFullQueueIsRefusedAtOnce(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		l := newLane(1, 1, time.Second)
		require.NoError(t, l.enter(t.Context()))
		waited := make(chan error)
		go func() { waited <- l.enter(t.Context()) }()
		synctest.Wait()
		before := time.Now()
		require.ErrorIs(t, l.enter(t.Context()), ErrBusy)
		require.Zero(t, time.Since(before))
		l.leave()
		require.NoError(t, <-waited)
	})
}

func TestPatienceEnds(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		l := newLane(1, 1, time.Second)
		require.NoError(t, l.enter(t.Context()))
		before := time.Now()
		require.ErrorIs(t, l.enter(t.Context()), ErrBusy)
		require.Equal(t, time.Second, time.Since(before))
		require.Zero(t, l.waiting.Load())
	})
}

func TestWaitingEndsWithTheCaller(t *testing.T) {
	gone := errors.New("gone")
	ctx, cancel := context.WithCancelCause(t.Context())
	l := newLane(1, 1, time.Hour)
	require.NoError(t, l.enter(ctx))
	cancel(gone)
	require.ErrorIs(t, l.enter(ctx), gone)
}

func TestChunksCoverTheRangeOnceForAnyNumberOfWorkers(t *testing.T) {
	for _, workers := range []int{1, 2, 7} {
		for _, n := range []int{0, 1, 63, 64, 65, 1000} {
			counts := make([]int, n)
			err := inChunks(t.Context(), nil, n, 64, workers, noWorkspace, keepNothing,
				func(_ struct{}, from, to int) {
					for i := from; i < to; i++ {
						counts[i]++
					}
				})
			require.NoError(t, err)
			for i, c := range counts {
				require.Equal(t, 1, c, "workers %d, n %d, index %d", workers, n, i)
			}
		}
	}
}

func TestChunksStopWhenCancelled(t *testing.T) {
	ctx, cancel := context.WithCancel(t.Context())
	done := 0
	err := inChunks(ctx, nil, 1000, 10, 1, noWorkspace, keepNothing, func(struct{}, int, int) {
		done++
		cancel()
	})
	require.ErrorIs(t, err, context.Canceled)
	require.Equal(t, 1, done)
}
