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

// index returns the bucket of a time, or -1 outside the record.
func (r *recorder) index(t float64) int {
	if r.width == 0 || t < r.from {
		return -1
	}
	n := len(r.buckets[Output])
	switch i := int((t - r.from) / r.width); {
	case i < n:
		return i
	case i == n && t <= r.from+r.width*float64(n)*(1+sameTime):
		return n - 1 // the end of the record itself
	}
	return -1
}

// reading is a signal's value and slope.
type reading struct{ value, slope float64 }

// look reads the signals at the present point, as a stretch without edges begins.
func (e *Engine) look(v *interval) {
	if e.trial {
		return
	}
	i := e.rec.index(e.now.at)
	for k := range signals {
		e.head[k] = reading{e.shape[e.now.drive][k].At(&e.now.z, e.width), v.slopes[k].At(&e.now.z, e.width)}
		e.keep(k, i, Sample{e.now.at, e.head[k].value})
	}
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
	to := m.at + h
	i := e.rec.index(to)
	for k := range signals {
		if k == InductorSum && e.joint.Circuit.Phases == 1 {
			continue
		}
		f := &e.shape[m.drive][k]
		was, is := e.head[k], reading{f.At(z, e.width), v.slopes[k].At(z, e.width)}
		e.head[k] = is
		e.keep(k, i, Sample{to, is.value})
		if !(was.slope*is.slope < 0) {
			continue
		}
		// An extreme lies inside; it is solved only where it can count.
		if !e.counts(k, between(was, is, h), m.at, i) {
			continue
		}
		turn := statespace.Event{Output: v.slopes[k]}
		if was.slope > 0 {
			turn.Output = negated(turn.Output)
		}
		x := m.z
		at := m.at + v.Cross(&turn, &x, h)
		e.keep(k, e.rec.index(at), Sample{at, f.At(&x, e.width)})
	}
	for i := 1; i < e.joint.Circuit.Phases; i++ {
		e.run.inductor(Sample{m.at, m.z[i]})
		e.run.inductor(Sample{to, z[i]})
	}
}

// between estimates the extreme between two readings with slopes of opposite sign
// from the cubic through them, short by a thousandth of what it rises between
// them: a new extreme counts when it beats the old one by more than that.
func between(from, to reading, h float64) float64 {
	// y = y0 + s0 t + b t² + c t³ with t in [0, h]
	mean := (to.value - from.value) / h
	b, c := (3*mean-2*from.slope-to.slope)/h, (from.slope+to.slope-2*mean)/(h*h)
	// The root of s0 + 2 b t + 3 c t² between the ends, in the form without cancellation.
	t := -from.slope / (b + math.Copysign(math.Sqrt(max(0, b*b-3*c*from.slope)), to.slope))
	y := from.value + t*(from.slope+t*(b+t*c))
	outer := max(from.value, to.value)
	if from.slope < 0 {
		outer = min(from.value, to.value)
	}
	return y - 1e-3*(y-outer)
}

// counts reports whether a value in a stretch of time that ends in bucket i would
// be a new extreme of a signal.
func (e *Engine) counts(k int, value, from float64, i int) bool {
	return e.run.counts(k, value) || e.rec.counts(k, value, i) || e.rec.counts(k, value, e.rec.index(from))
}

func (r *recorder) counts(k int, value float64, i int) bool {
	if i < 0 {
		return false
	}
	b := &r.buckets[k][i]
	return !b.used || value < b.least.Value || value > b.greatest.Value
}

func (e *Engine) keep(k, i int, s Sample) {
	e.run.keep(k, s)
	if i >= 0 {
		e.rec.buckets[k][i].add(s)
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
