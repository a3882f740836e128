//go:build e2e

package bench

import (
	"os/exec"
	"regexp"
	"strconv"
	"syscall"
	"testing"
	"time"

	"github.com/stretchr/testify/require"
)

// usage runs work and returns its wall-clock and processor seconds, those of its
// child processes included.
func usage(t *testing.T, work func()) (wall, processor float64) {
	t.Helper()
	seconds := func() float64 {
		sum := 0.0
		for _, who := range []int{syscall.RUSAGE_SELF, syscall.RUSAGE_CHILDREN} {
			var u syscall.Rusage
			require.NoError(t, syscall.Getrusage(who, &u))
			sum += float64(u.Utime.Nano()+u.Stime.Nano()) / 1e9
		}
		return sum
	}
	before, start := seconds(), time.Now()
	work()
	return time.Since(start).Seconds(), seconds() - before
}

// A million electro-thermal evaluations over the API against a vectorised script
// with textbook formulas at as many samples, in one run.
func TestAMillionSamplesAgainstAVectorisedScript(t *testing.T) {
	python := ""
	for _, candidate := range []string{"python3", "/usr/bin/python3"} {
		if exec.CommandContext(t.Context(), candidate, "-c", "import numpy").Run() == nil {
			python = candidate
			break
		}
	}
	if python == "" {
		t.Skip("no python3 with numpy here")
	}
	const samples = 1_000_000
	h := handler()
	serve(t, h, "/v1/corners", drawn(t, 1000, 0, "independent"))
	own := func(seed int) func() {
		return func() { serve(t, h, "/v1/corners", drawn(t, samples, seed, "independent")) }
	}
	var told float64
	script := func() {
		out, err := exec.CommandContext(t.Context(), python, "numpy_monte_carlo.py", strconv.Itoa(samples)).Output()
		require.NoError(t, err)
		told, err = strconv.ParseFloat(string(regexp.MustCompile(`samples ([0-9.]+) s`).FindSubmatch(out)[1]), 64)
		require.NoError(t, err)
	}
	for k := range 3 {
		wall, processor := usage(t, own(k+1))
		_, theirs := usage(t, script)
		t.Logf("over HTTP %.2f s (processor %.2f s), script %.2f s (processor %.2f s with its start): %.2f times its speed, %.2f by processor time on two cores", wall, processor, told, theirs, told/wall, theirs/(processor/2))
	}
}
