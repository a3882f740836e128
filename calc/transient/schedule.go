package transient

import (
	"math"
	"sort"

	"railproof/calc/loop"
)

// breakpoint changes the inputs at a time.
type breakpoint struct {
	at    float64 // [s]
	input int
	jump  float64 // added at once
	rate  float64 // added to the rate
	event int     // the event that begins here, or noEvent
	soft  bool    // the soft start ends here
}

const noEvent = -1

// schedule lists what happens to the inputs, in order of time.
func (e *Engine) schedule() {
	s := &e.setup
	if s.Start.Kind == AtRest {
		reference := s.Plant.Feedback.Reference
		if s.Start.SoftStart > 0 {
			rate := reference / s.Start.SoftStart
			e.points = append(e.points,
				breakpoint{at: 0, input: loop.InputReference, rate: rate, event: noEvent},
				breakpoint{at: s.Start.SoftStart, input: loop.InputReference, rate: -rate, event: noEvent, soft: true})
		} else {
			e.points = append(e.points, breakpoint{at: 0, input: loop.InputReference, jump: reference, event: noEvent, soft: true})
		}
	}
	for i := range s.Events {
		v := &s.Events[i]
		input := loop.InputLoad
		switch v.Kind {
		case InputStep:
			input = loop.InputVoltage
		case ReferenceStep:
			input = loop.InputReference
		case ControlTone, LoadTone, InputTone:
			continue
		}
		if !(v.Slew > 0) || math.IsInf(v.Slew, 1) {
			e.points = append(e.points, breakpoint{at: v.At, input: input, jump: v.Change, event: i})
			continue
		}
		rate := math.Copysign(v.Slew, v.Change)
		e.points = append(e.points,
			breakpoint{at: v.At, input: input, rate: rate, event: i},
			breakpoint{at: v.At + v.Change/rate, input: input, rate: -rate, event: noEvent})
	}
	sort.SliceStable(e.points, func(a, b int) bool { return e.points[a].at < e.points[b].at })
}

// pass applies a breakpoint.
func (e *Engine) pass(p *breakpoint) {
	m := &e.now
	m.z[e.joint.N+p.input] += p.jump
	if p.rate != 0 {
		m.rate[p.input] += p.rate
		if math.Abs(m.rate[p.input]) < 1e-12*math.Abs(p.rate) {
			m.rate[p.input] = 0 // the ramp has ended
		}
		m.rates = e.rateIndex()
	}
	if p.soft {
		m.soft = false
		for i := range e.joint.Circuit.Phases {
			if m.legs[i] == loop.Idle && !e.blocking(i) {
				m.legs[i] = loop.Low
			}
		}
	}
	if p.event != noEvent {
		e.run.begin(e, p.event)
	}
}

// rateIndex returns the index of the present rates among those met so far.
func (e *Engine) rateIndex() int {
	for i, r := range e.rateList {
		if r == e.now.rate {
			return i
		}
	}
	e.rateList = append(e.rateList, e.now.rate)
	return len(e.rateList) - 1
}

// blocking reports whether the rectifier of a phase blocks reverse current now:
// during a soft start every rectifier does, so that a precharged output is not
// discharged.
func (e *Engine) blocking(i int) bool { return e.now.soft || blocks(&e.joint.Circuit, i) }
