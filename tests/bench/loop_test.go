package bench

import (
	"encoding/json"
	"strconv"
	"strings"
	"syscall"
	"testing"
	"time"

	"github.com/stretchr/testify/require"
)

// changing returns requests that differ in one number, so that none is answered from
// kept results.
func changing(b testing.TB, text, was string, value float64, step float64) func() []byte {
	b.Helper()
	before, after, found := strings.Cut(text, was)
	require.True(b, found, was)
	name, _, _ := strings.Cut(was, ": ")
	n := 0.0
	return func() []byte {
		n++
		return []byte(before + name + ": " + strconv.FormatFloat(value+step*n, 'g', -1, 64) + after)
	}
}

// processor returns the processor time that this process has used: what a machine
// with other work on it does not stretch as it does the wall clock.
func processor(b testing.TB) time.Duration {
	b.Helper()
	var u syscall.Rusage
	require.NoError(b, syscall.Getrusage(syscall.RUSAGE_SELF, &u))
	return time.Duration(u.Utime.Nano() + u.Stime.Nano())
}

// BenchmarkLoopGain is the server time of one loop with both models at 300
// frequencies, validations and encoding included.
func BenchmarkLoopGain(b *testing.B) {
	h := handler()
	text := string(example(b, "buoy-5v0/loop-gain.json"))
	i := strings.Index(text, `"points"`)
	require.Positive(b, i)
	head := text[:i] + `"point": {"input_v": 24, "source_ohm": 0.05, "load": {"current_a": 5}, "ambient_degc": 25}, `
	for name, tail := range map[string]string{"300-frequencies": `"frequencies": {"count": 300}}`, "margins": `"curves": false, "frequencies": {"count": 2}}`} {
		b.Run(name, func(b *testing.B) {
			next := changing(b, head+tail, `"current_a": 5`, 5, 1e-6)
			began := processor(b)
			for b.Loop() {
				serve(b, h, "/v1/loop-gain", next())
			}
			b.ReportMetric(float64((processor(b)-began).Nanoseconds())/float64(b.N), "cpu-ns/op")
		})
	}
}

// BenchmarkTransients is the server time of 5 ms of a stage at 500 kHz through a load
// step.
func BenchmarkTransients(b *testing.B) {
	h := handler()
	text := strings.Replace(string(example(b, "buoy-5v0/transients.json")), `"duration_s": 0.0005`, `"duration_s": 0.005`, 1)
	next := changing(b, text, `"to_a": 6`, 6, 1e-6)
	began := processor(b)
	for b.Loop() {
		serve(b, h, "/v1/transients", next())
	}
	b.ReportMetric(float64((processor(b)-began).Nanoseconds())/float64(b.N), "cpu-ns/op")
}

// BenchmarkMarginsInCorners tells what the margins add to each evaluation of a drawn
// unit: of two runs that differ in their units only, with and without a margin.
func BenchmarkMarginsInCorners(b *testing.B) {
	h := handler()
	text := string(example(b, "buoy-5v0/corners.json"))
	i, j := strings.Index(text, `"limits"`), strings.Index(text, `"methods"`)
	require.True(b, 0 < i && i < j)
	run := func(quantities string, units, seed int) (time.Duration, float64) {
		began := processor(b)
		w := serve(b, h, "/v1/corners", []byte(text[:i]+`"quantities": [`+quantities+`], "methods": ["monte-carlo"], "samples": `+strconv.Itoa(units)+`, "seed": `+strconv.Itoa(seed)+`}`))
		var answer struct {
			Evaluations float64 `json:"evaluations"`
		}
		require.NoError(b, json.Unmarshal(w.Body.Bytes(), &answer))
		return processor(b) - began, answer.Evaluations
	}
	seed := 1
	perEvaluation := func(quantities string) float64 {
		seed++
		few, fewer := run(quantities, 100, seed)
		many, more := run(quantities, 2100, seed)
		require.Greater(b, more, fewer)
		return float64((many - few).Nanoseconds()) / (more - fewer)
	}
	for b.Loop() {
		without := perEvaluation(`"output_ripple_pp_v"`)
		b.ReportMetric(perEvaluation(`"output_ripple_pp_v", "phase_margin_deg"`)-without, "cpu-ns/margin")
	}
}
