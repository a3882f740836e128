package transient

import (
	"math"

	"railproof/calc/loop"
	"railproof/calc/statespace"
)

// Recorded signals.
const (
	Output       = iota // [V] output voltage at the capacitors
	Inductor            // [A] inductor current of phase 0
	InductorSum         // [A] of all phases
	ControlValue        // [V] control voltage
	signals
)

// signal returns the functional of a recorded signal in the present drive.
func (e *Engine) signal(k int) statespace.Functional {
	var f statespace.Functional
	switch k {
	case Output:
		return e.joint.Output
	case ControlValue:
		return e.control[e.now.drive]
	case Inductor:
		f[0] = 1
	case InductorSum:
		for i := range e.joint.Circuit.Phases {
			f[i] = 1
		}
	}
	return f
}

// Sample is a value at a time.
type Sample struct {
	At    float64 // [s]
	Value float64 // [any] in the signal's unit
}

// bucket keeps the extremes of one signal in a stretch of the record.
type bucket struct {
	least, greatest Sample
	used            bool
}

func (b *bucket) add(s Sample) {
	if !b.used {
		b.least, b.greatest, b.used = s, s, true
		return
	}
	if s.Value < b.least.Value {
		b.least = s
	}
	if s.Value > b.greatest.Value {
		b.greatest = s
	}
}

// recorder decimates the waveforms: of every bucket the true extremes are kept.
type recorder struct {
	from, width float64
	buckets     [signals][]bucket
}

// PeriodFigures sums up one period.
type PeriodFigures struct {
	At       float64 // [s] its end
	Mean     float64 // [V] mean output voltage, exact
	Inductor float64 // [A] inductor current of phase 0 at the clock
	Control  float64 // [V] control voltage at the clock
}

func (r *recorder) set(e *Engine) {
	s := &e.setup
	if s.Record.Points == 0 {
		return
	}
	r.from = s.Record.From
	r.width = (s.recordEnd() - r.from) / float64(s.Record.Points)
	for k := range r.buckets {
		r.buckets[k] = make([]bucket, s.Record.Points)
	}
}

// at returns the bucket of a signal at a time, or nil outside the record.
func (r *recorder) at(k int, t float64) *bucket {
	if r.width == 0 || t < r.from {
		return nil
	}
	i := int((t - r.from) / r.width)
	b := r.buckets[k]
	switch {
	case i < len(b):
		return &b[i]
	case i == len(b) && t <= r.from+r.width*float64(len(b))*(1+sameTime):
		return &b[i-1] // the end of the record itself
	}
	return nil
}

// observe takes the signals' values and extremes over the step from the present
// point to z.
func (e *Engine) observe(v *interval, z *statespace.Point, h float64) {
	if e.trial {
		return
	}
	m := &e.now
	if m.drive != loop.Linear {
		e.run.now.Clamped += h
	}
	for k := range signals {
		if k == InductorSum && e.joint.Circuit.Phases == 1 {
			continue
		}
		f := &e.shape[m.drive][k]
		from, to := Sample{m.at, f.At(&m.z, e.width)}, Sample{m.at + h, f.At(z, e.width)}
		e.keep(k, from)
		e.keep(k, to)
		s0, s1 := v.slopes[k].At(&m.z, e.width), v.slopes[k].At(z, e.width)
		if !(s0*s1 < 0) {
			continue
		}
		// An extreme lies inside. Solve it only where it can count: the tangents
		// at both ends bound it.
		sign := 1.0
		if s0 > 0 {
			sign = -1
		}
		bound := sign * max(sign*from.Value-math.Abs(s0)*h, sign*to.Value-math.Abs(s1)*h)
		if !e.counts(k, bound, m.at, m.at+h) {
			continue
		}
		turn := statespace.Event{Output: v.slopes[k]}
		if sign < 0 {
			turn.Output = negated(turn.Output)
		}
		x := m.z
		at := v.Cross(&turn, &x, h)
		e.keep(k, Sample{m.at + at, f.At(&x, e.width)})
	}
	for i := 1; i < e.joint.Circuit.Phases; i++ {
		e.run.inductor(Sample{m.at, m.z[i]})
		e.run.inductor(Sample{m.at + h, z[i]})
	}
}

// counts reports whether a value somewhere in a stretch of time would be a new
// extreme of a signal.
func (e *Engine) counts(k int, value, from, to float64) bool {
	if e.run.counts(k, value) {
		return true
	}
	for _, t := range [2]float64{from, to} {
		if b := e.rec.at(k, t); b != nil && (!b.used || value < b.least.Value || value > b.greatest.Value) {
			return true
		}
	}
	return false
}

func (e *Engine) keep(k int, s Sample) {
	e.run.keep(k, s)
	if b := e.rec.at(k, s.At); b != nil {
		b.add(s)
	}
}

// Waveform returns the record of a signal: of every bucket the least and the
// greatest value in the order in which they came, or one point where they are
// one.
func (e *Engine) Waveform(signal int) []Sample {
	if signal == InductorSum && e.joint.Circuit.Phases == 1 {
		signal = Inductor
	}
	var w []Sample
	for _, b := range e.rec.buckets[signal] {
		if !b.used {
			continue
		}
		first, second := b.least, b.greatest
		if second.At < first.At {
			first, second = second, first
		}
		w = append(w, first)
		if second.At > first.At {
			w = append(w, second)
		}
	}
	return w
}

// functionalsOfSignals prepares the recorded signals for every drive.
func (e *Engine) functionalsOfSignals() {
	drive := e.now.drive
	for d := range e.shape {
		e.now.drive = loop.Drive(d)
		for k := range e.shape[d] {
			e.shape[d][k] = e.signal(k)
		}
	}
	e.now.drive = drive
}
