//go:build e2e

package e2e

import (
	"context"
	"fmt"
	"math"
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
	t.Parallel() // with others that wait most of the time
	long := 6 * time.Second
	if given := os.Getenv("RAILPROOF_SOAK"); given != "" {
		var err error
		long, err = time.ParseDuration(given)
		require.NoError(t, err)
	}
	s := start(t, []string{"--address", "127.0.0.1:0", "--admin-address", "127.0.0.1:0", "--results-bytes", "1000000", "--keep-bytes", "1000000", "--log-level", "warn"})
	k := &soak{t: t, s: s}
	for until := time.Now().Add(long / 4); time.Now().Before(until); { // what is kept for reuse
		k.round()
	}
	before := k.settled()
	for until := time.Now().Add(long); time.Now().Before(until); {
		k.round()
	}
	after := k.settled()
	t.Logf("%d requests in %v: live heap %.1f -> %.1f MiB, goroutines %.0f -> %.0f, resident %d -> %d MiB", k.count, long, before.live, after.live, before.goroutines, after.goroutines, before.resident, after.resident)
	require.LessOrEqual(t, after.goroutines, before.goroutines+8)
	require.Less(t, after.live, before.live+8)
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

// settled is what the server uses when it has nothing to do any more.
func (k *soak) settled() usage {
	t := k.t
	http.DefaultClient.CloseIdleConnections()
	require.Eventually(t, func() bool {
		return k.reads("railproof_http_requests_in_flight") == 1 && k.reads(`railproof_lane_busy{lane="jobs"}`) == 0
	}, 20*time.Second, 20*time.Millisecond, "what was cancelled stops")
	u := usage{goroutines: k.atRest()}
	for tries := 0; ; tries++ { // for some seconds after the start the queue starts services of its own
		again := k.atRest()
		if again == u.goroutines {
			break
		}
		require.Less(t, tries, 15, "the number of goroutines does not come to rest: %v, %v", u.goroutines, again)
		u.goroutines = again
	}
	profile := ""
	for range 3 { // what a pool holds is garbage at the second collection only
		_, profile = get(t, k.s.admin+"heap?gc=1&debug=1")
	}
	_, after, found := strings.Cut(profile, "# HeapAlloc = ")
	require.True(t, found)
	value, _, _ := strings.Cut(after, "\n")
	bytes, err := strconv.ParseFloat(value, 64)
	require.NoError(t, err)
	u.live = bytes / (1 << 20)
	u.resident = resident(t, k.s)
	return u
}

// atRest is the least number of goroutines of two seconds: one or two come and go.
func (k *soak) atRest() float64 {
	least := math.Inf(1)
	for range 20 {
		least = min(least, k.reads("go_goroutines"))
		time.Sleep(100 * time.Millisecond)
	}
	return least
}

type usage struct {
	live       float64 // [MiB] of the heap that a collection leaves
	goroutines float64
	resident   int // [MiB]
}

// reads returns one of the server's metrics.
func (k *soak) reads(metric string) float64 {
	_, text := get(k.t, k.s.base+"/metrics")
	_, after, found := strings.Cut("\n"+text, "\n"+metric+" ")
	require.True(k.t, found, metric)
	value, _, _ := strings.Cut(after, "\n")
	number, err := strconv.ParseFloat(value, 64)
	require.NoError(k.t, err)
	return number
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
