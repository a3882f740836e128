package main

import (
	"context"
	"runtime"
	"runtime/debug"
	"runtime/metrics"
	"time"
)

const (
	idleLook  = 5 * time.Second
	idleGrows = 1 << 20 // [bytes] allocated between two looks by what runs beside requests
)

// tidy gives memory that is no longer needed back to the system whenever the program
// has become idle: after its start, of which most is garbage, and after work. The
// runtime itself would collect it minutes later, and keep much of it.
func tidy(ctx context.Context) {
	sample := []metrics.Sample{{Name: "/gc/heap/allocs:bytes"}}
	allocated := func() uint64 {
		metrics.Read(sample)
		return sample[0].Value.Uint64()
	}
	look := time.NewTicker(idleLook)
	defer look.Stop()
	giveBack()
	last, clean := allocated(), true
	for {
		select {
		case <-ctx.Done():
			return
		case <-look.C:
		}
		now := allocated()
		idle := now-last < idleGrows
		if idle && !clean {
			giveBack()
		}
		last, clean = now, idle
	}
}

// giveBack collects twice: what a pool holds is garbage at the second collection only.
func giveBack() {
	runtime.GC()
	debug.FreeOSMemory()
}
