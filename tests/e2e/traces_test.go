package e2e

import (
	"bytes"
	"encoding/hex"
	"io"
	"net/http"
	"net/http/httptest"
	"strings"
	"sync"
	"syscall"
	"testing"
	"time"

	"github.com/stretchr/testify/require"
)

// collector takes what an exporter sends by the OpenTelemetry protocol. The messages
// are in protocol buffers, where a text and the bytes of an identifier stand as they
// are.
type collector struct {
	mutex sync.Mutex
	path  string
	spans bytes.Buffer
}

func (c *collector) ServeHTTP(w http.ResponseWriter, r *http.Request) {
	c.mutex.Lock()
	defer c.mutex.Unlock()
	c.path = r.URL.Path
	_, _ = io.Copy(&c.spans, r.Body) // what is missing then is missed below
	w.Header().Set("Content-Type", "application/x-protobuf")
}

func TestTracesGoToTheCollector(t *testing.T) {
	c := new(collector)
	receiver := httptest.NewServer(c)
	defer receiver.Close()
	s := start(t, []string{"--address", "127.0.0.1:0"}, "OTEL_EXPORTER_OTLP_ENDPOINT="+receiver.URL, "OTEL_SERVICE_NAME=rails-of-the-night")
	const trace, parent = "4bf92f3577b34da6a3ce929d0e0e4736", "00f067aa0ba902b7"
	request, err := http.NewRequestWithContext(t.Context(), http.MethodPost, s.base+"/v1/losses?timings=true", strings.NewReader(example(t, "buoy-5v0/losses.json")))
	require.NoError(t, err)
	request.Header.Set("Content-Type", "application/json")
	request.Header.Set("X-Request-Id", "night-17")
	request.Header.Set("Traceparent", "00-"+trace+"-"+parent+"-01")
	response, err := http.DefaultClient.Do(request)
	require.NoError(t, err)
	defer response.Body.Close()
	require.Equal(t, 200, response.StatusCode)

	deferred, err := http.NewRequestWithContext(t.Context(), http.MethodPost, s.base+"/v1/sizing", strings.NewReader(example(t, "buoy-3v3/sizing.json")))
	require.NoError(t, err)
	deferred.Header.Set("Content-Type", "application/json")
	deferred.Header.Set("Prefer", "respond-async, wait=10")
	response, err = http.DefaultClient.Do(deferred)
	require.NoError(t, err)
	defer response.Body.Close()
	require.Equal(t, 200, response.StatusCode)

	require.NoError(t, s.process.Process.Signal(syscall.SIGTERM))
	require.NoError(t, s.process.Wait(), "what is not sent yet is sent at the end; log %s", s.log)
	require.Equal(t, "/v1/traces", c.path)
	for _, text := range []string{"rails-of-the-night", "POST /v1/losses", "POST /v1/sizing", "job sizing", "railproof.request_id", "night-17", "railproof.result_id", "res_", "railproof.job", "job_", "railproof.evaluations"} {
		require.Contains(t, c.spans.String(), text)
	}
	for _, identifier := range []string{trace, parent} {
		bits, err := hex.DecodeString(identifier)
		require.NoError(t, err)
		require.True(t, bytes.Contains(c.spans.Bytes(), bits), "the span goes on with its caller's trace")
	}
	require.NotContains(t, c.spans.String(), "timings", "no parameters")
	require.NotContains(t, c.spans.String(), "buoy", "no part data")
}

// A collector that is away delays nothing but the end, and that within the grace.
func TestACollectorThatIsAwayHoldsNothingUp(t *testing.T) {
	s := start(t, []string{"--address", "127.0.0.1:0", "--grace", "1s"}, "OTEL_EXPORTER_OTLP_ENDPOINT=http://127.0.0.1:1")
	status, answer := post(t, s.base+"/v1/losses", example(t, "buoy-5v0/losses.json"))
	require.Equal(t, 200, status, answer)
	began := time.Now()
	require.NoError(t, s.process.Process.Signal(syscall.SIGTERM))
	require.NoError(t, s.process.Wait(), "log %s", s.log)
	require.Less(t, time.Since(began), 20*time.Second)
}
