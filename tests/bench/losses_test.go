// Package bench measures what a caller of the server sees.
package bench

import (
	"bytes"
	"context"
	"io/fs"
	"net/http"
	"net/http/httptest"
	"slices"
	"strconv"
	"strings"
	"testing"
	"time"

	"github.com/stretchr/testify/require"

	"railproof/api"
	"railproof/openapi"
	"railproof/service"
)

func handler() http.Handler {
	return api.New(api.Options{Service: service.New(service.Options{ContractVersion: openapi.Load().Version()})})
}

func example(b testing.TB, name string) []byte {
	b.Helper()
	body, err := fs.ReadFile(openapi.Examples(), name)
	require.NoError(b, err)
	return body
}

// serve answers one request in process: everything but the socket.
func serve(b testing.TB, h http.Handler, path string, body []byte) *httptest.ResponseRecorder {
	b.Helper()
	w := httptest.NewRecorder()
	h.ServeHTTP(w, request(path, body))
	require.Equal(b, http.StatusOK, w.Code, "%s", w.Body)
	return w
}

func request(path string, body []byte) *http.Request {
	r := httptest.NewRequestWithContext(context.Background(), http.MethodPost, path, bytes.NewReader(body))
	r.Header.Set("Content-Type", "application/json")
	return r
}

// fresh returns requests that differ in the load current, so that none is answered
// from kept results.
func fresh(b testing.TB) func() []byte {
	b.Helper()
	before, after, found := strings.Cut(string(example(b, "buoy-5v0/losses.json")), `"current_a": 6`)
	require.True(b, found)
	n := 0
	return func() []byte {
		n++
		return []byte(before + `"current_a": ` + strconv.FormatFloat(6-1e-6*float64(n), 'g', -1, 64) + after)
	}
}

// BenchmarkLossesOnePoint is the server time of one point, both validations
// included; the median is reported beside the mean.
func BenchmarkLossesOnePoint(b *testing.B) {
	h, next := handler(), fresh(b)
	serve(b, h, "/v1/losses", next())
	b.ReportAllocs()
	took := make([]time.Duration, 0, 1<<16)
	var room bytes.Buffer
	for b.Loop() {
		r, w := request("/v1/losses", next()), httptest.NewRecorder()
		room.Reset()
		w.Body = &room // of the client, not of the server
		start := time.Now()
		h.ServeHTTP(w, r)
		took = append(took, time.Since(start))
		require.Equal(b, http.StatusOK, w.Code, "%s", w.Body)
	}
	slices.Sort(took)
	b.ReportMetric(float64(took[len(took)/2].Nanoseconds()), "median-ns/op")
}
