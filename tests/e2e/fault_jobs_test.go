//go:build e2e

package e2e

import (
	"encoding/json"
	"fmt"
	"net/http"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"syscall"
	"testing"
	"time"

	"github.com/stretchr/testify/require"

	"railproof/tests/cluster"
)

// rail is a corner run of an example rail with so many samples and another seed.
func rail(t *testing.T, name string, samples, seed int) string {
	t.Helper()
	var tree map[string]any
	require.NoError(t, json.Unmarshal([]byte(example(t, name+"/corners.json")), &tree))
	tree["samples"], tree["seed"] = samples, seed
	tree["methods"] = []any{"extreme-value", "monte-carlo"}
	body, err := json.Marshal(tree)
	require.NoError(t, err)
	return string(body)
}

func ask(t *testing.T, method, url, body string, headers ...string) (*http.Response, map[string]any) {
	t.Helper()
	response, tree, err := try(t, method, url, body, headers...)
	require.NoError(t, err)
	return response, tree
}

func try(t *testing.T, method, url, body string, headers ...string) (*http.Response, map[string]any, error) {
	request, err := http.NewRequestWithContext(t.Context(), method, url, strings.NewReader(body))
	require.NoError(t, err)
	request.Header.Set("Content-Type", "application/json")
	for i := 0; i < len(headers); i += 2 {
		request.Header.Set(headers[i], headers[i+1])
	}
	response, err := http.DefaultClient.Do(request)
	if err != nil {
		return nil, nil, err
	}
	defer response.Body.Close()
	var tree map[string]any
	_ = json.NewDecoder(response.Body).Decode(&tree) // no body, or none of JSON: the caller looks at the status
	return response, tree, nil
}

func begin(t *testing.T, base, operation, body string) string {
	t.Helper()
	response, tree := ask(t, http.MethodPost, base+"/v1/"+operation, body, "Prefer", "respond-async")
	require.Equal(t, 202, response.StatusCode, "%v", tree)
	return tree["id"].(string)
}

// ended waits for the end of a job at whichever server answers.
func ended(t *testing.T, id string, most time.Duration, bases ...string) map[string]any {
	t.Helper()
	until := time.Now().Add(most)
	var last map[string]any
	for time.Now().Before(until) {
		for _, base := range bases {
			response, tree, err := try(t, http.MethodGet, base+"/v1/jobs/"+id, "")
			if err != nil || response.StatusCode != 200 {
				continue
			}
			last = tree
			if s := tree["state"]; s != "waiting" && s != "running" {
				return tree
			}
		}
		time.Sleep(20 * time.Millisecond)
	}
	t.Fatalf("job %s did not end within %v: %v", id, most, last)
	return nil
}

func untilRunning(t *testing.T, base, id string) {
	t.Helper()
	require.Eventually(t, func() bool {
		_, tree := ask(t, http.MethodGet, base+"/v1/jobs/"+id, "")
		return tree["state"] == "running"
	}, 20*time.Second, 10*time.Millisecond)
}

func result(t *testing.T, base string, job map[string]any) string {
	t.Helper()
	require.Equal(t, "done", job["state"], "%v", job)
	status, body := get(t, base+"/v1/results/"+job["result_id"].(string))
	require.Equal(t, 200, status)
	return body
}

// restart is what a user sees who starts the program again on the same data.
func restart(t *testing.T, directory string) *served {
	return start(t, []string{"--address", "127.0.0.1:0", "--data-directory", directory}, "RAILPROOF_EPHEMERAL=")
}

func TestKilledInTheMiddleOfAJob(t *testing.T) {
	directory := t.TempDir()
	body := rail(t, "buoy-3v3", 50_000, 1)
	s := restart(t, directory)
	id := begin(t, s.base, "corners", body)
	untilRunning(t, s.base, id)
	require.NoError(t, s.process.Process.Signal(syscall.SIGKILL))
	_ = s.process.Wait() // killed, as asked
	before := time.Now()
	s = restart(t, directory)
	job := ended(t, id, 60*time.Second, s.base)
	t.Logf("done %v after the restart began", time.Since(before).Round(time.Millisecond))
	require.Equal(t, railproof(t, body, "corners", "-").out, result(t, s.base, job))
}

func TestKilledAgainAndAgainAJobIsGivenUp(t *testing.T) {
	directory := t.TempDir()
	body := rail(t, "buoy-3v3", 1_000_000, 2)
	s := restart(t, directory)
	id := begin(t, s.base, "corners", body)
	for range 3 {
		untilRunning(t, s.base, id)
		require.NoError(t, s.process.Process.Signal(syscall.SIGKILL))
		_ = s.process.Wait()
		s = restart(t, directory)
	}
	job := ended(t, id, 10*time.Second, s.base)
	require.Equal(t, "failed", job["state"])
	require.Contains(t, job["problem"].(map[string]any)["type"], "/docs/problems/internal")
	status, _ := get(t, s.base+"/readyz")
	require.Equal(t, 200, status)
}

func TestTerminatedInTheMiddleOfAJob(t *testing.T) {
	directory := t.TempDir()
	s := start(t, []string{"--address", "127.0.0.1:0", "--data-directory", directory, "--grace", "1ms"}, "RAILPROOF_EPHEMERAL=")
	body := rail(t, "buoy-3v3", 50_000, 3)
	id := begin(t, s.base, "corners", body)
	untilRunning(t, s.base, id)
	before := time.Now()
	require.NoError(t, s.process.Process.Signal(syscall.SIGTERM))
	_ = s.process.Wait()
	require.Less(t, time.Since(before), 5*time.Second)
	require.Contains(t, s.log.String(), `"msg":"job given back"`)
	s = restart(t, directory)
	require.Equal(t, railproof(t, body, "corners", "-").out, result(t, s.base, ended(t, id, 60*time.Second, s.base)))
}

// TestDatabaseGoneAndBack kills the database under two replicas in the middle of their
// work. RAILPROOF_OUTAGE sets for how long, such as 15s, after which the replicas have
// not seen each other for longer than a dead one is waited for.
func TestDatabaseGoneAndBack(t *testing.T) {
	outage := 2 * time.Second
	if given := os.Getenv("RAILPROOF_OUTAGE"); given != "" {
		var err error
		outage, err = time.ParseDuration(given)
		require.NoError(t, err)
	}
	c := cluster.Start(t)
	replicas := []*served{replica(t, c), replica(t, c)}
	var bodies, ids []string
	for i := range 8 {
		samples := 500
		if i == 3 {
			samples = 130_000 // in two parts
		}
		bodies = append(bodies, rail(t, "buoy-3v3", samples, i))
		ids = append(ids, begin(t, replicas[i%2].base, "corners", bodies[i]))
	}
	ended(t, ids[0], 60*time.Second, replicas[0].base)
	c.Kill()
	for i, s := range replicas {
		response, tree := ask(t, http.MethodPost, s.base+"/v1/corners", rail(t, "buoy-3v3", 500, 100+i), "Prefer", "respond-async")
		require.Equal(t, 503, response.StatusCode, "%v", tree)
		require.NotEmpty(t, response.Header.Get("Retry-After"))
		status, ready := get(t, s.base+"/readyz")
		require.Equal(t, 503, status)
		require.Contains(t, ready, "store of jobs")
		status, answer := post(t, s.base+"/v1/losses", example(t, "buoy-5v0/losses.json"))
		require.Equal(t, 200, status, "what needs no database is answered: %s", answer)
	}
	time.Sleep(outage)
	c.Resume()
	back := time.Now()
	var found []string
	for i, id := range ids {
		found = append(found, result(t, replicas[1-i%2].base, ended(t, id, 120*time.Second, replicas[1-i%2].base)))
	}
	t.Logf("all done %v after the database was back", time.Since(back).Round(time.Millisecond))
	for _, i := range []int{0, 3, 7} {
		require.True(t, railproof(t, bodies[i], "corners", "-").out == found[i], "%d %.300s", i, found[i])
	}
	for _, s := range replicas {
		require.NotContains(t, s.log.String(), "stopped beating", "who could not beat is not dead")
		status, _ := get(t, s.base+"/readyz")
		require.Equal(t, 200, status)
	}
}

func TestDiskFull(t *testing.T) {
	if os.Getuid() != 0 {
		t.Skip("mounting a small file system needs root")
	}
	directory := t.TempDir()
	require.NoError(t, exec.Command("mount", "-t", "tmpfs", "-o", "size=3m", "railproof", directory).Run())
	t.Cleanup(func() { _ = exec.Command("umount", "-l", directory).Run() })
	data := filepath.Join(directory, "data")
	s := restart(t, data)
	first := begin(t, s.base, "sizing", example(t, "buoy-5v0/sizing.json"))
	want := result(t, s.base, ended(t, first, 30*time.Second, s.base))

	filler := filepath.Join(directory, "filler")
	require.Error(t, exec.Command("dd", "if=/dev/zero", "of="+filler, "bs=4096", "count=1000").Run(), "until nothing fits any more")
	refusals := 0
	for i := range 40 { // what is free inside the file is used first
		response, tree := ask(t, http.MethodPost, s.base+"/v1/corners", rail(t, "buoy-3v3", 100+i, i), "Prefer", "respond-async")
		if response.StatusCode == 202 {
			continue
		}
		require.Equal(t, 503, response.StatusCode, "%v", tree)
		require.NotEmpty(t, response.Header.Get("Retry-After"))
		require.NotContains(t, fmt.Sprint(tree), "disk", "nothing of the inside")
		refusals++
	}
	require.Positive(t, refusals)
	status, answer := post(t, s.base+"/v1/losses", example(t, "buoy-5v0/losses.json"))
	require.Equal(t, 200, status, "what needs no disk is answered: %s", answer)
	status, ready := get(t, s.base+"/readyz")
	require.Equal(t, 503, status)
	require.Contains(t, ready, "store of jobs")

	require.NoError(t, os.Remove(filler))
	require.Eventually(t, func() bool { status, _ := get(t, s.base+"/readyz"); return status == 200 }, 20*time.Second, 50*time.Millisecond)
	id := begin(t, s.base, "sizing", example(t, "mast-12v0/sizing.json"))
	ended(t, id, 60*time.Second, s.base)
	_, list := ask(t, http.MethodGet, s.base+"/v1/jobs?limit=200", "")
	for _, j := range list["jobs"].([]any) {
		job := ended(t, j.(map[string]any)["id"].(string), 120*time.Second, s.base)
		require.Equal(t, "done", job["state"], "what was accepted is done: %v", job)
	}
	_, again := ask(t, http.MethodGet, s.base+"/v1/jobs/"+first, "")
	require.Equal(t, want, result(t, s.base, again))
}
