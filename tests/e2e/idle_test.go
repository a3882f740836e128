//go:build e2e

package e2e

import (
	"testing"
	"time"

	"github.com/stretchr/testify/require"
)

// A server that has nothing to do takes little: after its start and again after work.
func TestIdleMemory(t *testing.T) {
	s := start(t, []string{"--address", "127.0.0.1:0"})
	small := func() bool { return resident(t, s) <= 60 }
	require.Eventually(t, small, 10*time.Second, 100*time.Millisecond)
	after := resident(t, s)
	for range 10 {
		status, answer := post(t, s.base+"/v1/losses", example(t, "buoy-5v0/losses.json"))
		require.Equal(t, 200, status, answer)
	}
	require.Eventually(t, small, 30*time.Second, 100*time.Millisecond)
	t.Logf("%d MiB after the start, %d MiB when idle after ten requests", after, resident(t, s))
}
