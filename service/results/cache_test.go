package results

import (
	"fmt"
	"math/rand/v2"
	"sync"
	"testing"

	"github.com/stretchr/testify/require"
)

func TestKeepsWhatWasAskedForLast(t *testing.T) {
	c := New(5 * sizeOf(make([]byte, 1000)))
	for i := range 5 {
		c.Put(fmt.Sprint(i), Answer{Body: make([]byte, 1000)})
	}
	_, found := c.Get("0")
	require.True(t, found)
	c.Put("5", Answer{Body: make([]byte, 1000)})
	_, found = c.Get("1")
	require.False(t, found, "asked for longest ago")
	for _, id := range []string{"0", "2", "3", "4", "5"} {
		_, found = c.Get(id)
		require.True(t, found, id)
	}
}

func TestNeverHoldsMoreThanItMay(t *testing.T) {
	const most = 100_000
	c := New(most)
	r := rand.New(rand.NewPCG(1, 2))
	for i := range 5000 {
		body := make([]byte, r.IntN(30_000))
		c.Put(fmt.Sprint(i), Answer{Body: body})
		answers, bytes := c.Held()
		require.LessOrEqual(t, bytes, int64(most))
		require.Equal(t, answers, c.recent.Len())
		_, kept := c.Get(fmt.Sprint(i))
		require.Equal(t, sizeOf(body) <= most/greatestShare, kept)
	}
}

func TestWithoutRoomNothingIsKept(t *testing.T) {
	c := New(0)
	c.Put("a", Answer{Body: []byte("x")})
	_, found := c.Get("a")
	require.False(t, found)
}

func TestConcurrentUse(t *testing.T) {
	c := New(50_000)
	var all sync.WaitGroup
	for w := range 4 {
		all.Go(func() {
			for i := range 2000 {
				id := fmt.Sprint((i * (w + 1)) % 97)
				c.Put(id, Answer{Media: "text/plain", Body: []byte(id)})
				if a, found := c.Get(id); found && string(a.Body) != id {
					t.Error("another answer's body")
				}
			}
		})
	}
	all.Wait()
}
