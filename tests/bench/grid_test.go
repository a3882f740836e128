package bench

import (
	"encoding/json"
	"net/http/httptest"
	"regexp"
	"strconv"
	"testing"
	"time"

	"github.com/stretchr/testify/require"
)

// gridRequest asks for 50 x 50 x 4 cells of the example stage.
func gridRequest(b testing.TB) []byte {
	b.Helper()
	var request map[string]any
	require.NoError(b, json.Unmarshal(example(b, "buoy-5v0/losses.json"), &request))
	axis := func(n int, from, to float64) []float64 {
		a := make([]float64, n)
		for i := range a {
			a[i] = from + (to-from)*float64(i)/float64(n-1)
		}
		return a
	}
	body, err := json.Marshal(map[string]any{
		"stage": request["stage"],
		"grid":  map[string]any{"input_v": axis(50, 18, 32), "load_current_a": axis(50, 0.1, 6), "ambient_degc": axis(4, -20, 60), "control": map[string]any{"regulate_to_v": 5}},
	})
	require.NoError(b, err)
	return body
}

var computeTime = regexp.MustCompile(`compute;dur=([0-9.]+)`)

func computeMillis(b testing.TB, w *httptest.ResponseRecorder) float64 {
	b.Helper()
	found := computeTime.FindStringSubmatch(w.Header().Get("Server-Timing"))
	require.NotNil(b, found)
	ms, err := strconv.ParseFloat(found[1], 64)
	require.NoError(b, err)
	return ms
}

// BenchmarkLossesGrid10000 is a grid of 10,000 cells: until the last byte, and the
// part of it that is computing.
func BenchmarkLossesGrid10000(b *testing.B) {
	h, body := handler(), gridRequest(b)
	compute := 0.0
	rounds := 0
	for b.Loop() {
		w := serve(b, h, "/v1/losses?timings=true", body)
		compute += computeMillis(b, w)
		rounds++
		b.ReportMetric(float64(w.Body.Len()), "bytes/answer")
	}
	b.ReportMetric(compute/float64(rounds), "compute-ms/op")
}

// A point is answered while a grid keeps every core busy.
func BenchmarkPointBesideGrids(b *testing.B) {
	h, next, grid := handler(), fresh(b), gridRequest(b)
	stop := make(chan struct{})
	done := make(chan struct{})
	go func() {
		defer close(done)
		for {
			select {
			case <-stop:
				return
			default:
				serve(b, h, "/v1/losses?timings=true", grid) // timed, so not a kept result
			}
		}
	}()
	var worst time.Duration
	for b.Loop() {
		point := next()
		start := time.Now()
		serve(b, h, "/v1/losses", point)
		worst = max(worst, time.Since(start))
	}
	close(stop)
	<-done
	b.ReportMetric(float64(worst.Microseconds())/1e3, "worst-ms/op")
}
