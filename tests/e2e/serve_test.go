package e2e

import (
	"bufio"
	"bytes"
	"io"
	"net/http"
	"os/exec"
	"slices"
	"strings"
	"sync"
	"syscall"
	"testing"
	"time"

	"github.com/stretchr/testify/require"
)

// served is a running server.
type served struct {
	base    string
	admin   string // where the profiles are; "" where none were asked for
	request string // the command line that it offers
	process *exec.Cmd
	log     *journal
}

// journal is what a running server has logged so far.
type journal struct {
	mutex sync.Mutex
	text  bytes.Buffer
}

func (j *journal) Write(p []byte) (int, error) {
	j.mutex.Lock()
	defer j.mutex.Unlock()
	return j.text.Write(p)
}

func (j *journal) String() string {
	j.mutex.Lock()
	defer j.mutex.Unlock()
	return j.text.String()
}

// start runs the server on a free port and reads its greeting.
func start(t *testing.T, args []string, environment ...string) *served {
	t.Helper()
	s := &served{log: new(journal)}
	s.process = exec.CommandContext(t.Context(), program, append([]string{"serve"}, args...)...)
	s.process.Dir = root
	s.process.Env = append(append(s.process.Environ(), "RAILPROOF_EPHEMERAL=true"), environment...)
	s.process.Stderr = s.log
	out, err := s.process.StdoutPipe()
	require.NoError(t, err)
	require.NoError(t, s.process.Start())
	t.Cleanup(func() {
		_ = s.process.Process.Kill() // may have ended already
		_ = s.process.Wait()
	})
	lines := bufio.NewScanner(out)
	for s.request == "" && lines.Scan() {
		name, value, _ := strings.Cut(strings.TrimSpace(lines.Text()), " ")
		switch value = strings.TrimSpace(value); name {
		case "serves":
			s.base = value
		case "profiles":
			s.admin = value
		case "try":
			s.request = value
		}
	}
	require.NotEmpty(t, s.request, "no greeting; log %s", s.log)
	return s
}

// get asks for an address; headers are names, each followed by its value.
func get(t *testing.T, url string, headers ...string) (int, string) {
	t.Helper()
	request, err := http.NewRequestWithContext(t.Context(), http.MethodGet, url, nil)
	require.NoError(t, err)
	for h := range slices.Chunk(headers, 2) {
		request.Header.Set(h[0], h[1])
	}
	r, err := http.DefaultClient.Do(request)
	require.NoError(t, err)
	defer r.Body.Close()
	body, err := io.ReadAll(r.Body)
	require.NoError(t, err)
	return r.StatusCode, string(body)
}

func post(t *testing.T, url, body string) (int, string) {
	t.Helper()
	request, err := http.NewRequestWithContext(t.Context(), http.MethodPost, url, strings.NewReader(body))
	require.NoError(t, err)
	request.Header.Set("Content-Type", "application/json")
	r, err := http.DefaultClient.Do(request)
	require.NoError(t, err)
	defer r.Body.Close()
	text, err := io.ReadAll(r.Body)
	require.NoError(t, err)
	return r.StatusCode, string(text)
}

func TestCommandLineAndServerGiveTheSameBytes(t *testing.T) {
	s := start(t, []string{"--address", "127.0.0.1:0"})
	for path, command := range map[string]string{"losses": "losses", "steady-state": "steady-state", "sizing": "size", "loop-gain": "loop", "transients": "transient"} {
		body := example(t, "buoy-3v3/"+path+".json")
		status, answer := post(t, s.base+"/v1/"+path, body)
		require.Equal(t, 200, status, answer)
		require.Equal(t, answer, railproof(t, body, command, "-").out, path)
	}
	// and refuse the same input with the same pointers
	bad := `{"stage": {"rectifier": "diode"}, "point": {"input_v": -1}}`
	status, answer := post(t, s.base+"/v1/losses", bad)
	require.Equal(t, 422, status)
	refused := railproof(t, bad, "losses", "-")
	require.Equal(t, 2, refused.code)
	require.Equal(t, pointers(answer), pointers(refused.err))
	require.NotEmpty(t, pointers(answer))
}

// pointers lists the places that a problem names.
func pointers(problem string) []string {
	var found []string
	for i, part := range strings.Split(strings.ReplaceAll(problem, `"pointer": "`, `"pointer":"`), `"pointer":"`) {
		if i > 0 {
			found = append(found, part[:strings.IndexByte(part, '"')])
		}
	}
	return found
}

func TestGreetingCanBePasted(t *testing.T) {
	if _, err := exec.LookPath("curl"); err != nil {
		t.Skip("the greeting is for curl, which is not here")
	}
	s := start(t, []string{"--address", "127.0.0.1:0"})
	shell := exec.CommandContext(t.Context(), "sh", "-c", s.request)
	shell.Dir = root
	out, err := shell.Output()
	require.NoError(t, err)
	require.Contains(t, string(out), `"status":"ok"`)
	status, page := get(t, s.base+"/docs")
	require.Equal(t, 200, status)
	require.Contains(t, page, "/v1/losses")
}

func TestServerIsReadySoonAndEndsInOrder(t *testing.T) {
	began := time.Now()
	s := start(t, nil, "RAILPROOF_ADDRESS=127.0.0.1:0", "RAILPROOF_LOG_LEVEL=info")
	status, _ := get(t, s.base+"/readyz")
	require.Equal(t, 200, status)
	require.Less(t, time.Since(began), 3*time.Second, "300 ms on an idle machine")
	require.NoError(t, s.process.Process.Signal(syscall.SIGTERM))
	require.NoError(t, s.process.Wait(), "exit code 0; log %s", s.log)
	require.Contains(t, s.log.String(), `"msg":"draining"`)
	require.Contains(t, s.log.String(), `"msg":"ended"`)
	require.Contains(t, s.log.String(), `"route":"/readyz"`)
}

func TestLimitsFromFlagsAndEnvironment(t *testing.T) {
	s := start(t, []string{"--address", "127.0.0.1:0", "--max-body-bytes", "1000"}, "RAILPROOF_MAX_BODY_BYTES=5")
	status, answer := post(t, s.base+"/v1/losses", strings.Repeat(" ", 1001))
	require.Equal(t, 413, status)
	require.Contains(t, answer, "at most 1000 bytes", "a flag wins over the environment")
	refused := exec.CommandContext(t.Context(), program, "serve")
	refused.Env = append(refused.Environ(), "RAILPROOF_DEADLINE=soon")
	out, err := refused.CombinedOutput()
	require.Error(t, err)
	require.Contains(t, string(out), "RAILPROOF_DEADLINE")
}
