package service

import (
	"sync/atomic"
	"testing"
	"testing/synctest"
	"time"

	"github.com/stretchr/testify/require"
)

// hog takes turn after turn, each of a millisecond, until the test is over; at tells
// how many compute at once.
func hog(c *cores, at, turns *atomic.Int32, until time.Time) {
	c.take()
	defer c.give()
	for time.Now().Before(until) {
		at.Add(1)
		time.Sleep(time.Millisecond)
		at.Add(-1)
		turns.Add(1)
		c.next()
	}
}

func TestWorkersOfAllRunsShareTheCores(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		c := newCores(2)
		var at atomic.Int32
		var turns [6]atomic.Int32
		until := time.Now().Add(time.Second)
		for i := range turns {
			go hog(c, &at, &turns[i], until)
		}
		most := func() (most int32) {
			for range 100 {
				time.Sleep(time.Millisecond)
				most = max(most, at.Load())
			}
			return most
		}
		require.EqualValues(t, 2, most())
		done := c.hasten()
		also := c.hasten()
		time.Sleep(2 * time.Millisecond) // turns that had begun end
		require.EqualValues(t, 1, most(), "one core is held back for short work, and only one")
		also()
		require.EqualValues(t, 1, most())
		done()
		require.EqualValues(t, 2, most())
		time.Sleep(time.Until(until) + 10*time.Millisecond)
		synctest.Wait()
		for i := range turns {
			require.InDelta(t, turns[0].Load(), turns[i].Load(), 3, "nobody is passed over")
		}
		require.Zero(t, c.busy)
	})
}

func TestOneCoreIsNotTakenFromLongWork(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		c := newCores(1)
		defer c.hasten()()
		var at, turns atomic.Int32
		hog(c, &at, &turns, time.Now().Add(10*time.Millisecond))
		require.EqualValues(t, 10, turns.Load())
	})
}
