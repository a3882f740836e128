package bench

import (
	"encoding/json"
	"runtime"
	"sync/atomic"
	"testing"
	"time"

	"github.com/stretchr/testify/require"
)

// analysis is buoy-5v0's corner request with other members put in.
func analysis(b testing.TB, members map[string]any) []byte {
	b.Helper()
	var tree map[string]any
	require.NoError(b, json.Unmarshal(example(b, "buoy-5v0/corners.json"), &tree))
	for name, v := range members {
		tree[name] = v
	}
	body, err := json.Marshal(tree)
	require.NoError(b, err)
	return body
}

// drawn asks for a number of units at one condition corner: as many evaluations
// with more than 15 spreads, one output bank and the electro-thermal equilibrium in
// every one. Limits give the quantities that are kept. A seed of its own keeps an
// answer from being one that was given before.
func drawn(b testing.TB, samples, seed int, sampling string) []byte {
	return analysis(b, map[string]any{
		"samples": samples, "seed": seed, "sampling": sampling, "methods": []string{"monte-carlo"},
		"condition_corners": []any{map[string]any{"input_v": 24, "load_current_a": 6, "ambient_degc": 45}},
	})
}

// BenchmarkCornersSamples is the server time of drawn units, told for a million.
func BenchmarkCornersSamples(b *testing.B) {
	const samples = 1 << 17
	for _, sampling := range []string{"independent", "sobol", "latin-hypercube"} {
		b.Run(sampling, func(b *testing.B) {
			h := handler()
			serve(b, h, "/v1/corners", drawn(b, 1000, 0, sampling))
			seed := 0
			for b.Loop() {
				seed++
				serve(b, h, "/v1/corners", drawn(b, samples, seed, sampling))
			}
			b.ReportMetric(b.Elapsed().Seconds()/float64(b.N)/samples*1e6, "s/million")
		})
	}
}

// BenchmarkCornersExtremes is the server time of the extreme values alone, over the
// eight limited quantities and all variables of the example.
func BenchmarkCornersExtremes(b *testing.B) {
	h, seed := handler(), 0
	body := func() []byte {
		seed++
		return analysis(b, map[string]any{"methods": []string{"extreme-value"}, "seed": seed})
	}
	var answer struct {
		Evaluations float64 `json:"evaluations"`
		Search      struct {
			Dimensions float64 `json:"dimensions"`
		} `json:"search"`
	}
	require.NoError(b, json.Unmarshal(serve(b, h, "/v1/corners", body()).Body.Bytes(), &answer))
	for b.Loop() {
		serve(b, h, "/v1/corners", body())
	}
	b.ReportMetric(answer.Evaluations, "evaluations")
	b.ReportMetric(answer.Search.Dimensions, "dimensions")
}

// mostExtra is the memory that a million units may take beside what a server that
// has answered before holds.
const mostExtra = 64 << 20 // [bytes]

// A million units are streamed: the heap in use never grows by more than 64 MiB,
// sampled every five milliseconds.
func TestAMillionUnitsStayWithinTheirMemory(t *testing.T) {
	if testing.Short() {
		t.Skip("a million evaluations")
	}
	h, body := handler(), drawn(t, 1_000_000, 1, "independent")
	serve(t, h, "/v1/corners", drawn(t, 1000, 0, "independent"))
	runtime.GC()
	var before runtime.MemStats
	runtime.ReadMemStats(&before)
	var most atomic.Uint64
	stop, stopped := make(chan struct{}), make(chan struct{})
	go func() {
		defer close(stopped)
		for {
			select {
			case <-stop:
				return
			case <-time.After(5 * time.Millisecond):
				var now runtime.MemStats
				runtime.ReadMemStats(&now)
				most.Store(max(most.Load(), now.HeapAlloc))
			}
		}
	}()
	serve(t, h, "/v1/corners", body)
	close(stop)
	<-stopped
	extra := int64(most.Load()) - int64(before.HeapAlloc)
	t.Logf("at most %.1f MiB beside the %.1f MiB held before", float64(extra)/(1<<20), float64(before.HeapAlloc)/(1<<20))
	require.Less(t, extra, int64(mostExtra))
}
