package bench

import (
	"strconv"
	"strings"
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
			for b.Loop() {
				serve(b, h, "/v1/loop-gain", next())
			}
		})
	}
}

// BenchmarkTransients is the server time of 5 ms of a stage at 500 kHz through a load
// step.
func BenchmarkTransients(b *testing.B) {
	h := handler()
	text := strings.Replace(string(example(b, "buoy-5v0/transients.json")), `"duration_s": 0.0005`, `"duration_s": 0.005`, 1)
	next := changing(b, text, `"to_a": 6`, 6, 1e-6)
	for b.Loop() {
		serve(b, h, "/v1/transients", next())
	}
}

// BenchmarkMarginsInCorners tells what the margins add to each drawn unit.
func BenchmarkMarginsInCorners(b *testing.B) {
	h := handler()
	const units = 2000
	text := string(example(b, "buoy-5v0/corners.json"))
	i, j := strings.Index(text, `"limits"`), strings.Index(text, `"methods"`)
	require.True(b, 0 < i && i < j)
	run := func(limit string, seed int) time.Duration {
		began := time.Now()
		serve(b, h, "/v1/corners", []byte(text[:i]+`"limits": [`+limit+`], "quantities": ["output_ripple_pp_v"], "methods": ["monte-carlo"], "samples": `+strconv.Itoa(units)+`, "seed": `+strconv.Itoa(seed)+`}`))
		return time.Since(began)
	}
	seed := 1
	for b.Loop() {
		seed += 2
		without := run(`{"quantity": "inductor_peak_a", "max": 9.2}`, seed)
		with := run(`{"quantity": "inductor_peak_a", "max": 9.2}, {"quantity": "phase_margin_deg", "min": 40}`, seed+1)
		b.ReportMetric(float64((with-without).Nanoseconds())/units, "ns/margin")
	}
}
