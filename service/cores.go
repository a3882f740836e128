package service

import (
	"runtime"
	"sync"
)

// cores bounds how many bulk workers compute at once, over all requests and jobs: as
// many as there are cores, one less while an interactive request is being computed,
// but never none. Without it two long runs would have twice as many workers as there
// are cores, and a short request would wait for all of them at each of its steps.
//
// A worker takes a turn before its first task and passes it on after each, below a
// millisecond; turns are given in the order in which they were asked for. A nil *cores
// bounds nothing.
type cores struct {
	mutex   sync.Mutex
	most    int
	busy    int             // turns that are being taken
	urgent  int             // interactive requests
	waiting []chan struct{} // in the order of their coming; closed to give the turn
}

func newCores(n int) *cores { return &cores{most: n} }

// take waits for a turn.
func (c *cores) take() {
	if c == nil {
		return
	}
	c.mutex.Lock()
	c.enter()
}

// next passes the turn on and waits for another one.
func (c *cores) next() {
	runtime.Gosched() // for who runs this with no more threads than cores
	if c == nil {
		return
	}
	c.mutex.Lock()
	c.busy--
	c.pass()
	c.enter()
}

// give ends a worker's turn.
func (c *cores) give() {
	if c == nil {
		return
	}
	c.mutex.Lock()
	defer c.mutex.Unlock()
	c.busy--
	c.pass()
}

// enter takes a turn, or waits for one in the queue. The caller holds the mutex, which
// is free afterwards.
func (c *cores) enter() {
	if len(c.waiting) == 0 && c.free() {
		c.busy++
		c.mutex.Unlock()
		return
	}
	mine := make(chan struct{})
	c.waiting = append(c.waiting, mine)
	c.mutex.Unlock()
	<-mine
}

// hasten holds back one core from bulk workers until the call that it returns.
func (c *cores) hasten() (done func()) {
	c.mutex.Lock()
	defer c.mutex.Unlock()
	c.urgent++
	return func() {
		c.mutex.Lock()
		defer c.mutex.Unlock()
		c.urgent--
		c.pass()
	}
}

// free reports whether one more bulk worker may compute. The caller holds the mutex.
func (c *cores) free() bool {
	most := c.most
	if c.urgent > 0 {
		most = max(1, most-1)
	}
	return c.busy < most
}

// pass gives turns to those who wait. The caller holds the mutex.
func (c *cores) pass() {
	for len(c.waiting) > 0 && c.free() {
		c.busy++
		close(c.waiting[0])
		c.waiting = c.waiting[1:]
	}
}
