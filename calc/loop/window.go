package loop

import (
	"math"

	"railproof/calc/parts"
	"railproof/calc/statespace"
	"railproof/calc/switched"
)

// edge tells what happens at the end of a segment.
type edge uint8

const (
	windowEnds  edge = iota
	turnsOff         // the high side of phase 0 turns off
	turnsOn          // a high side turns on
	comesToRest      // a blocked rectifier's current reaches zero
)

// segment is a stretch of time in which no switch moves.
type segment struct {
	legs  Legs
	time  float64 // [s]
	ends  edge
	phase int // whose edge it is
}

const maxSegments = 4

// window is what happens between one decision of a comparator and the next: a
// period, or with N equal phases an N-th of one, after which every phase takes
// the place of the one before it. It starts when the comparator of phase 0
// decides; its high side turns off a delay later.
type window struct {
	length  float64 // [s]
	count   int
	segment [maxSegments]segment
}

func (w *window) set(p *Plant) {
	c := &p.Circuit
	n := c.Phases
	w.length = c.Period / float64(n)
	on := p.Duty * c.Period
	decide := on - p.Modulator.Delay // in the cycle of phase 0

	// Phase turning turns on next: the first whose clock is not before decide.
	turning := min(n, max(1, int(math.Ceil(decide/w.length-edgeSnap))))
	onAt := max(0, float64(turning)*w.length-decide)
	var legs Legs
	for j := range n {
		if j >= turning {
			legs[j] = Low
		}
	}
	var events [3]struct {
		at    float64
		ends  edge
		phase int
	}
	count := 2
	events[0].at, events[0].ends = p.Modulator.Delay, turnsOff
	events[1].at, events[1].ends, events[1].phase = onAt, turnsOn, turning%n
	if p.Mode == switched.Discontinuous {
		// The phase that turned off back windows ago comes to rest in this one.
		rest := p.Modulator.Delay + p.Conduct*c.Period
		back := int(math.Floor(rest/w.length + edgeSnap))
		events[2].at = max(0, rest-float64(back)*w.length)
		events[2].ends, events[2].phase = comesToRest, (n-back%n)%n
		count = 3
		for j := turning; j < n-back; j++ {
			legs[j] = Idle
		}
	}
	for i := 1; i < count; i++ {
		for k := i; k > 0 && events[k].at < events[k-1].at; k-- {
			events[k], events[k-1] = events[k-1], events[k]
		}
	}
	at := 0.0
	w.count = 0
	for _, e := range events[:count] {
		w.add(&legs, e.at-at, e.ends, e.phase)
		at = e.at
		switch e.ends {
		case turnsOff:
			legs[0] = Low
		case turnsOn:
			legs[e.phase] = High
		case comesToRest:
			legs[e.phase] = Idle
		}
	}
	w.add(&legs, w.length-at, windowEnds, 0)
}

// edgeSnap is the part of a window within which two edges count as one.
const edgeSnap = 1e-12

func (w *window) add(legs *Legs, time float64, ends edge, phase int) {
	w.segment[w.count] = segment{*legs, max(0, time), ends, phase}
	w.count++
}

// rotate moves the current of every phase to the phase before it, in a point and
// likewise in the rows of a matrix with the given stride.
func rotate(rows []float64, stride, phases int) {
	if phases < 2 {
		return
	}
	var first [statespace.Width]float64
	copy(first[:stride], rows[:stride])
	copy(rows[:(phases-1)*stride], rows[stride:phases*stride])
	copy(rows[(phases-1)*stride:phases*stride], first[:stride])
}

// feedForwardRate returns the slope of the ramp per volt of input [1/s], 0
// without feed-forward.
func (p *Plant) feedForwardRate() float64 {
	if p.Modulator.Mode != parts.VoltageMode || !p.Modulator.FeedForward {
		return 0
	}
	return p.RampSlope() / p.Circuit.Vin
}
