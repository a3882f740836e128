//go:build e2e

package e2e

import (
	"context"
	"fmt"
	"net/http"
	"os"
	"strconv"
	"strings"
	"testing"
	"time"

	"github.com/stretchr/testify/require"
)

// TestSoak sends requests of every kind for a while and looks whether memory or
// goroutines grow: answers, refusals, callers that go, jobs that end and that are
// cancelled, streams of events, pictures, reports. RAILPROOF_SOAK sets how long, such as
// 10m.
func TestSoak(t *testing.T) {
	long := 6 * time.Second
	if given := os.Getenv("RAILPROOF_SOAK"); given != "" {
		var err error
		long, err = time.ParseDuration(given)
		require.NoError(t, err)
	}
	s := start(t, []string{"--address", "127.0.0.1:0", "--results-bytes", "1000000", "--keep-bytes", "1000000", "--log-level", "warn"})
	k := &soak{t: t, s: s}
	for until := time.Now().Add(long / 4); time.Now().Before(until); { // what is kept for reuse
		k.round()
	}
	before := k.settled()
	for until := time.Now().Add(long); time.Now().Before(until); {
		k.round()
	}
	after := k.settled()
	t.Logf("%d requests in %v: heap %.1f -> %.1f MiB, goroutines %.0f -> %.0f, resident %d -> %d MiB", k.count, long, before.heap, after.heap, before.goroutines, after.goroutines, before.resident, after.resident)
	require.LessOrEqual(t, after.goroutines, before.goroutines+8)
	require.Less(t, after.heap, before.heap+8)
}

type soak struct {
	t     *testing.T
	s     *served
	count int
}

// fresh is a request of an example that was not sent before.
func (k *soak) fresh(name string) string {
	k.count++
	return strings.Replace(example(k.t, name), `"name": "`, fmt.Sprintf(`"name": "n%d-`, k.count), 1)
}

func (k *soak) round() {
	t, base := k.t, k.s.base
	for path, name := range map[string]string{
		"losses": "buoy-5v0/losses.json", "steady-state": "mast-12v0/steady-state.json", "sizing": "buoy-3v3/sizing.json",
		"loop-gain": "buoy-3v3/loop-gain.json", "transients": "mast-12v0/transients.json", "rule-checks": "buoy-3v3/rule-checks.json",
	} {
		status, answer := post(t, base+"/v1/"+path, k.fresh(name))
		require.Equal(t, 200, status, answer)
	}
	picture, _ := ask(t, http.MethodPost, base+"/v1/losses", k.fresh("buoy-5v0/losses.json"), "Accept", "image/png")
	require.Equal(t, 200, picture.StatusCode)
	status, _ := post(t, base+"/v1/losses", `{"stage": 1}`)
	require.Equal(t, 422, status)
	ctx, cancel := context.WithTimeout(t.Context(), 2*time.Millisecond)
	defer cancel()
	request, err := http.NewRequestWithContext(ctx, http.MethodPost, base+"/v1/losses", strings.NewReader(k.fresh("buoy-5v0/losses.json")))
	require.NoError(t, err)
	if response, err := http.DefaultClient.Do(request); err == nil { // most are gone before the answer
		_ = response.Body.Close()
	}
	k.count++
	id := begin(t, base, "corners", rail(t, "buoy-3v3", 500, k.count))
	status, events := get(t, base+"/v1/jobs/"+id+"/events") // to the end of the job
	require.Equal(t, 200, status)
	require.Contains(t, events, `"state":"done"`)
	k.count++
	id = begin(t, base, "corners", rail(t, "buoy-5v0", 100_000, k.count))
	gone, _ := ask(t, http.MethodDelete, base+"/v1/jobs/"+id, "")
	require.Contains(t, []int{200, 409}, gone.StatusCode)
}

// settled is what the server uses when it has nothing to do any more and has given
// back what it can.
func (k *soak) settled() usage {
	http.DefaultClient.CloseIdleConnections()
	time.Sleep(12 * time.Second)
	u := memory(k.t, k.s)
	u.resident = resident(k.t, k.s)
	return u
}

type usage struct {
	heap       float64 // [MiB]
	goroutines float64
	resident   int // [MiB]
}

func memory(t *testing.T, s *served) (u usage) {
	t.Helper()
	_, text := get(t, s.base+"/metrics")
	for line := range strings.Lines(text) {
		name, value, _ := strings.Cut(strings.TrimSpace(line), " ")
		number, _ := strconv.ParseFloat(value, 64)
		switch name {
		case "go_memstats_heap_alloc_bytes":
			u.heap = number / (1 << 20)
		case "go_goroutines":
			u.goroutines = number
		}
	}
	require.Positive(t, u.goroutines)
	return u
}

// resident is the server's memory in MiB.
func resident(t *testing.T, s *served) int {
	t.Helper()
	text, err := os.ReadFile(fmt.Sprintf("/proc/%d/status", s.process.Process.Pid))
	require.NoError(t, err)
	for line := range strings.Lines(string(text)) {
		if fields := strings.Fields(line); len(fields) > 1 && fields[0] == "VmRSS:" {
			kib, err := strconv.Atoi(fields[1])
			require.NoError(t, err)
			return kib >> 10
		}
	}
	t.Fatal("no memory in the status")
	return 0
}
