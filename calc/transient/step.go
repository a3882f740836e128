package transient

import (
	"math"

	"railproof/calc/loop"
	"railproof/calc/statespace"
)

// watchKind tells what a watched output stands for.
type watchKind uint8

const (
	comparatorTrips watchKind = iota
	limitTrips
	currentRests
	controlHigh
	controlLow
	controlLeaves
	loadConnects
)

// watcher is an event that may end the present interval.
type watcher struct {
	kind  watchKind
	phase int
	event *statespace.Event
	start float64 // value as the step begins
	end   float64 // and as it ends
}

// advance moves the run to the time given, edge by edge.
func (e *Engine) advance(until float64) {
	for e.status == Running {
		e.serve()
		if e.now.at >= until-e.grain() {
			return
		}
		e.glide(e.nextAppointment(until))
	}
}

// grain is the time below which two instants are one [s].
func (e *Engine) grain() float64 { return sameTime * e.setup.Plant.Circuit.Period }

// nextAppointment returns the next time at which something is due for certain.
func (e *Engine) nextAppointment(until float64) float64 {
	m := &e.now
	t := until
	if m.next < len(e.points) {
		t = min(t, e.points[m.next].at)
	}
	for i := range e.joint.Circuit.Phases {
		p := &m.phases[i]
		t = min(t, p.clock)
		if m.legs[i] != loop.High {
			continue
		}
		t = min(t, p.off)
		if end := p.since + e.most; end < p.clock {
			t = min(t, end)
		}
		if open := p.since + e.blank; open > m.at+e.grain() {
			t = min(t, open)
		}
	}
	return t
}

// serve does everything that is due at the present time.
func (e *Engine) serve() {
	m := &e.now
	due := m.at + e.grain()
	for i := range e.joint.Circuit.Phases {
		p := &m.phases[i]
		if m.legs[i] == loop.High {
			switch {
			case p.off <= due:
				e.turnOff(i)
			case p.since+e.most <= due && p.since+e.most < p.clock-e.grain():
				e.run.now.AtMaxDuty++
				e.turnOff(i)
			}
		}
		if p.clock <= due {
			e.turnOn(i)
		}
	}
	for m.next < len(e.points) && e.points[m.next].at <= due {
		e.pass(&e.points[m.next])
		m.next++
	}
}

func (e *Engine) turnOff(i int) {
	m := &e.now
	m.legs[i] = loop.Low
	m.phases[i].off = math.Inf(1)
	if e.blocking(i) && m.z[i] <= 0 {
		m.legs[i], m.z[i] = loop.Idle, 0
		e.run.rested = true
	}
}

// turnOn is the clock of a phase. A pulse whose comparator or limit is tripped
// already is left out.
func (e *Engine) turnOn(i int) {
	m := &e.now
	p := &m.phases[i]
	if i == 0 {
		e.closePeriod()
	}
	p.count++
	p.since, p.ramp, p.off, p.decided = m.at, 0, math.Inf(1), false
	p.clock = e.clock(i, p.count)
	if e.comparator(i).At(&m.z, e.width, 0) >= 0 || m.z[i] >= e.limit {
		e.run.now.Skipped++
		switch m.legs[i] {
		case loop.High:
			e.turnOff(i)
		case loop.Idle:
			e.run.rested = true
		}
		return
	}
	m.legs[i] = loop.High
}

// clock returns the time of a phase's n-th clock, formed anew each time so that
// rounding does not add up.
func (e *Engine) clock(i, n int) float64 {
	c := &e.joint.Circuit
	return (float64(n) + float64(i)/float64(c.Phases)) * c.Period
}

// comparator returns the trip event of a phase with its ramp as it stands.
func (e *Engine) comparator(i int) *statespace.Event {
	m := &e.now
	v := &e.trip[m.drive][i]
	v.Offset = m.phases[i].ramp
	v.Ramp, v.Curve = e.slope, 0
	if e.follow != 0 {
		v.Ramp = e.follow * m.z[e.joint.N+loop.InputVoltage]
		v.Curve = e.follow * m.rate[loop.InputVoltage] / 2
	}
	return v
}

// watch lists what may end the present interval.
func (e *Engine) watch() {
	m := &e.now
	e.watched = e.watched[:0]
	add := func(k watchKind, i int, v *statespace.Event) {
		e.watched = append(e.watched, watcher{kind: k, phase: i, event: v, start: v.At(&m.z, e.width, 0)})
	}
	for i := range e.joint.Circuit.Phases {
		p := &m.phases[i]
		switch m.legs[i] {
		case loop.High:
			if !p.decided && m.at >= p.since+e.blank-e.grain() {
				add(comparatorTrips, i, e.comparator(i))
				if e.limit < math.Inf(1) {
					add(limitTrips, i, &e.over[i])
				}
			}
		case loop.Low:
			if e.blocking(i) {
				add(currentRests, i, &e.rest[i])
			}
		}
	}
	if m.drive == loop.Linear {
		if e.setup.Bounds.ControlHigh < math.Inf(1) {
			add(controlHigh, 0, &e.high)
		}
		add(controlLow, 0, &e.low)
	} else {
		add(controlLeaves, 0, &e.leave[m.drive])
	}
	if m.waits {
		add(loadConnects, 0, &e.connect)
	}
}

// glide moves to the time t, or to the first edge before it.
func (e *Engine) glide(t float64) {
	m := &e.now
	v := e.motion()
	if v == nil {
		return
	}
	e.watch()
	e.look(v)
	for m.at < t-e.grain() {
		h := t - m.at
		var z statespace.Point
		if h >= v.Step*(1-sameTime) {
			h = v.Step
			v.Whole(&z, &m.z)
		} else {
			z = m.z
			v.Advance(&z, h)
		}
		first, at := e.earliest(v, &z, h)
		if first != nil {
			h = at
		}
		e.commit(v, &z, h)
		if first != nil {
			e.fire(first)
			return
		}
		for k := range e.watched {
			w := &e.watched[k]
			w.start = w.end
			if w.kind == comparatorTrips { // its ramp has moved on
				e.comparator(w.phase)
				w.start = w.event.At(&m.z, e.width, 0)
			}
		}
	}
	if math.Abs(m.at-t) <= e.grain() {
		m.at = t
	}
}

// earliest returns the first event of the step that ends at z after the time h,
// and moves z to it; nil if there is none.
func (e *Engine) earliest(v *interval, z *statespace.Point, h float64) (first *watcher, at float64) {
	at = h
	for k := range e.watched {
		w := &e.watched[k]
		w.end = w.event.At(z, e.width, at)
		latches := w.kind == comparatorTrips || w.kind == limitTrips
		if !(w.end >= 0) && !(latches && w.start >= 0) {
			continue
		}
		if w.start >= 0 {
			*z, at, first = e.now.z, 0, w
			return first, at
		}
		*z = e.now.z
		at = v.Cross(w.event, z, at)
		first = w
	}
	return first, at
}

// commit records the step from the present point to z and makes z the present.
func (e *Engine) commit(v *interval, z *statespace.Point, h float64) {
	m := &e.now
	if h > 0 {
		e.observe(v, z, h)
		for i := range e.joint.Circuit.Phases {
			p := &m.phases[i]
			p.ramp += e.slope * h
			if e.follow != 0 {
				p.ramp += e.follow * h * (m.z[e.joint.N+loop.InputVoltage] + m.rate[loop.InputVoltage]*h/2)
			}
		}
	}
	m.z = *z
	m.at += h
}

// fire carries out what an event asks for.
func (e *Engine) fire(w *watcher) {
	m := &e.now
	m.edges++
	if m.edges > maxEdges {
		e.status = Stalled
		return
	}
	switch w.kind {
	case comparatorTrips, limitTrips:
		p := &m.phases[w.phase]
		p.decided = true
		p.off = m.at + e.delay
		if w.kind == limitTrips {
			e.run.now.Limited++
		}
	case currentRests:
		m.legs[w.phase], m.z[w.phase] = loop.Idle, 0
		e.run.rested = true
	case controlHigh:
		m.drive = loop.HeldHigh
	case controlLow:
		m.drive = loop.HeldLow
	case controlLeaves:
		m.drive = loop.Linear
	case loadConnects:
		m.waits = false
		m.z[e.joint.N+loop.InputLoad] += e.setup.Plant.Circuit.Current
	}
}
