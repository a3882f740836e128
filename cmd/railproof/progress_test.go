package main

import (
	"bytes"
	"os"
	"testing"
	"time"

	"github.com/stretchr/testify/require"
)

func TestProgressLine(t *testing.T) {
	require.Equal(t, "corners  3 s", progressLine("corners", 0, 0, 3*time.Second), "nothing is known yet")
	require.Equal(t, "corners  [============            ]  50 %  500 of 1000 evaluations, 4 s left", progressLine("corners", 500, 1000, 4*time.Second))
	require.Equal(t, "corners  [========================] 100 %  1200 of 1000 evaluations", progressLine("corners", 1200, 1000, 4*time.Second), "more than was expected")
	require.LessOrEqual(t, len(progressLine("substitute", 123456789, 987654321, time.Hour)), 100, "one line of a terminal")
}

func TestProgressIsTakenAway(t *testing.T) {
	var out bytes.Buffer
	over, first := make(chan struct{}), make(chan time.Time, 1)
	first <- time.Now()
	seen := 0
	showProgress(&out, "corners", func() (int64, int64) {
		if seen++; seen == 2 {
			close(over)
		}
		return 1, 2
	}, time.Now(), first, over)
	require.Contains(t, out.String(), "50 %")
	require.True(t, bytes.HasSuffix(out.Bytes(), []byte("\r\x1b[K")))
}

func TestShortRunsShowNoProgress(t *testing.T) {
	var out bytes.Buffer
	over := make(chan struct{})
	close(over)
	showProgress(&out, "losses", func() (int64, int64) { return 1, 2 }, time.Now(), make(chan time.Time), over)
	require.Empty(t, out.String())
}

func TestFilesAndPipesAreNoTerminals(t *testing.T) {
	f, err := os.CreateTemp(t.TempDir(), "out")
	require.NoError(t, err)
	defer f.Close()
	require.False(t, isTerminal(f))
	require.False(t, isTerminal(new(bytes.Buffer)))
}

func TestColouredVerdicts(t *testing.T) {
	got := string(coloured([]byte("output_ripple_pp_v  pass   12 mV\njunction  fail  130\npassive  failure  bypass\nverdict: not-evaluated\n")))
	require.Equal(t, "output_ripple_pp_v  "+green+"pass"+plain+"   12 mV\njunction  "+red+"fail"+plain+"  130\npassive  failure  bypass\nverdict: "+yellow+"not-evaluated"+plain+"\n", got)
}
