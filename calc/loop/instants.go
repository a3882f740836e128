package loop

import (
	"math"

	"railproof/calc/switched"
)

// instants are when unequal phases switch, each counted from its own clock.
type instants struct {
	on   [switched.MaxPhases]float64 // [s] at which the high side turns off
	rest [switched.MaxPhases]float64 // [s] at which the current comes to rest; +Inf: it does not
}

// happening is one edge of a period.
type happening struct {
	at    float64 // [s] after the start of the window
	ends  edge
	phase int
}

// lay lays out the window of unequal phases. Of the comparators the one with the
// longest quiet time before its decision starts it.
func (w *window) lay(p *Plant, t *instants) {
	c := &p.Circuit
	n, period := c.Phases, c.Period
	w.length, w.places, w.count = period, 1, 0

	clock := func(k int) float64 { return float64(k) * period / float64(n) }
	within := func(x float64) float64 { return x - period*math.Floor(x/period) }
	delay := p.Modulator.Delay
	first, longest := 0, -1.0
	for k := range n {
		quiet := period
		for i := range n {
			if i != k {
				quiet = min(quiet, within(clock(k)+t.on[k]-clock(i)-t.on[i]))
			}
		}
		if quiet > longest {
			first, longest = k, quiet
		}
	}
	start := clock(first) + t.on[first] - delay

	var legs Legs
	var events [maxSegments - 1]happening
	count := 0
	insert := func(at float64, ends edge, phase int) {
		i := count
		for ; i > 0 && (events[i-1].at > at || events[i-1].at == at && events[i-1].ends > ends); i-- {
			events[i] = events[i-1]
		}
		events[i] = happening{at, ends, phase}
		count++
	}
	for k := range n {
		decided := 0.0
		if k != first {
			decided = within(clock(k) + t.on[k] - delay - start)
			switch since := within(start - clock(k)); {
			case since < t.on[k]:
				legs[k] = High
			case since < t.rest[k]:
				legs[k] = Low
			default:
				legs[k] = Idle
			}
		}
		insert(decided, decides, k)
		insert(decided+delay, turnsOff, k)
		insert(within(clock(k)-start), turnsOn, k)
		if t.rest[k] < period {
			insert(within(clock(k)+t.rest[k]-start), comesToRest, k)
		}
	}
	at := 0.0
	for _, e := range events[:count] {
		w.add(&legs, e.at-at, e.ends, e.phase)
		at = e.at
		switch e.ends {
		case turnsOff:
			legs[e.phase] = Low
		case turnsOn:
			legs[e.phase] = High
		case comesToRest:
			legs[e.phase] = Idle
		}
	}
	w.add(&legs, w.length-at, windowEnds, 0)
}
