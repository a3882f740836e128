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
	decides          // the comparator of a phase decides
	turnsOff         // its high side turns off
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

const maxSegments = 4*switched.MaxPhases + 1

// window is the time after which the stage repeats itself. It starts as a
// comparator decides, when nothing else that was decided is still waiting for its
// delay.
//
// With N equal phases it is an N-th of the period, from one decision to the next,
// after which every phase takes the place of the one before it. With unequal phases
// it is the whole period, with N decisions.
type window struct {
	length  float64 // [s]
	places  int     // phases that change places at its end; 1: none
	resting int     // of equal phases: whose current comes to rest in it
	count   int
	segment [maxSegments]segment
}

// set lays out the window of equal phases.
func (w *window) set(p *Plant) {
	c := &p.Circuit
	n := c.Phases
	w.length, w.places = c.Period/float64(n), n
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
		w.resting = (n - back%n) % n
		events[2].ends, events[2].phase = comesToRest, w.resting
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
	w.add(&legs, 0, decides, 0)
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
