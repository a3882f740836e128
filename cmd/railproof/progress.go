package main

import (
	"context"
	"fmt"
	"io"
	"os"
	"strings"
	"time"

	"golang.org/x/term"

	"railproof/service"
)

const (
	progressAfter = time.Second            // what is done sooner needs no bar
	progressEvery = 200 * time.Millisecond // between two looks
	barWidth      = 24                     // [characters]
)

// isTerminal reports whether people look at what is written to w.
func isTerminal(w io.Writer) bool {
	f, ok := w.(*os.File)
	return ok && term.IsTerminal(int(f.Fd())) //nolint:gosec // descriptors are small
}

// watched returns a context whose run is shown on standard error, where that is a
// terminal; end takes the line away.
func watched(ctx context.Context, t terminal, name string) (run context.Context, end func()) {
	if !isTerminal(t.err) {
		return ctx, func() {}
	}
	meter := new(service.Meter)
	over, done := make(chan struct{}), make(chan struct{})
	go func() {
		defer close(done)
		showProgress(t.err, name, meter.Progress, time.Now(), time.After(progressAfter), over)
	}()
	return service.WithMeter(ctx, meter), func() {
		close(over)
		<-done
	}
}

// showProgress draws the state of the meter on one line from first until over.
func showProgress(w io.Writer, name string, progress func() (done, expected int64), start time.Time, first <-chan time.Time, over <-chan struct{}) {
	select {
	case <-over:
		return
	case <-first:
	}
	tick := time.NewTicker(progressEvery)
	defer tick.Stop()
	for {
		done, expected := progress()
		fmt.Fprintf(w, "\r%s\x1b[K", progressLine(name, done, expected, time.Since(start)))
		select {
		case <-over:
			fmt.Fprint(w, "\r\x1b[K")
			return
		case <-tick.C:
		}
	}
}

// progressLine says how far a run is and, once it is under way, how long it will
// still take.
func progressLine(name string, done, expected int64, took time.Duration) string {
	if expected <= 0 {
		return fmt.Sprintf("%s  %.0f s", name, took.Seconds())
	}
	share := min(float64(done)/float64(expected), 1)
	full := int(share * barWidth)
	line := fmt.Sprintf("%s  [%s%s] %3.0f %%  %d of %d evaluations", name, strings.Repeat("=", full), strings.Repeat(" ", barWidth-full), 100*share, done, expected)
	if share > 0 && share < 1 {
		line += fmt.Sprintf(", %.0f s left", took.Seconds()*(1-share)/share)
	}
	return line
}
