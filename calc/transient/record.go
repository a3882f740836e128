package transient

import (
	"math"
	"sort"

	"railproof/calc/loop"
	"railproof/calc/statespace"
	"railproof/calc/switched"
)

// Signals whose extremes are kept: output, control voltage, then the inductor
// current of every phase.
const (
	outputSignal = iota
	controlSignal
	firstInductor
	maxSignals = firstInductor + switched.MaxPhases
)

// Row is one instant of the record.
type Row struct {
	At        float64                     // [s]
	Output    float64                     // [V] at the capacitors
	Control   float64                     // [V] output of the error amplifier
	Reference float64                     // [V]
	Load      float64                     // [A] constant-current part
	Input     float64                     // [V] of the source
	Inductor  [switched.MaxPhases]float64 // [A]
	Duty      float64                     // [1] of phase 0 in the period that the instant lies in
	period    int
	order     int // in which rows were read: at a jump two of them share an instant
}

// extremes holds the rows of the least and the greatest value of one signal.
type extremes struct {
	least, greatest    float64
	leastRow, greatRow Row
	used               bool
}

// recorder decimates the waveforms: of every bucket the true extremes of every
// signal are kept, each with all signals at that instant.
type recorder struct {
	from, width float64
	count       int // signals
	rows        int // read so far
	buckets     [][]extremes
}

func (r *recorder) set(e *Engine) {
	s := &e.setup
	r.count = firstInductor + e.joint.Circuit.Phases
	if s.Record.Points == 0 {
		return
	}
	n := max(1, s.Record.Points/(2*r.count))
	r.from = s.Record.From
	r.width = (s.recordEnd() - r.from) / float64(n)
	r.buckets = make([][]extremes, n)
	room := make([]extremes, n*r.count)
	for i := range r.buckets {
		r.buckets[i] = room[i*r.count : (i+1)*r.count]
	}
}

// index returns the bucket of a time, or -1 outside the record.
func (r *recorder) index(t float64) int {
	if r.width == 0 || t < r.from {
		return -1
	}
	n := len(r.buckets)
	switch i := int((t - r.from) / r.width); {
	case i < n:
		return i
	case i == n && t <= r.from+r.width*float64(n)*(1+sameTime):
		return n - 1 // the end of the record itself
	}
	return -1
}

// signal returns the functional of a signal in a drive.
func (e *Engine) signal(k int, d loop.Drive) statespace.Functional {
	switch k {
	case outputSignal:
		return e.joint.Output
	case controlSignal:
		return e.control[d]
	}
	var f statespace.Functional
	f[k-firstInductor] = 1
	return f
}

// row reads all signals of a point.
func (e *Engine) row(z *statespace.Point, at float64) Row {
	n := e.joint.N
	r := Row{
		At: at, Output: e.joint.Output.At(z, e.width), Control: e.control[e.now.drive].At(z, e.width),
		Reference: z[n+loop.InputReference], Load: z[n+loop.InputLoad], Input: z[n+loop.InputVoltage],
		Duty: math.NaN(), period: e.run.periods, order: e.rec.rows,
	}
	e.rec.rows++
	copy(r.Inductor[:e.joint.Circuit.Phases], z[:e.joint.Circuit.Phases])
	return r
}

// reading is a signal's value and slope.
type reading struct{ value, slope float64 }

// look reads the signals at the present point, as a stretch without edges begins.
func (e *Engine) look(v *interval) {
	if e.trial {
		return
	}
	m := &e.now
	i := e.rec.index(m.at)
	read := e.read(v, &m.z)
	for k := range e.rec.count {
		e.head[k] = reading{read[k], read[e.rec.count+k]}
		e.keep(k, i, e.head[k].value, &m.z, m.at)
	}
}

// read returns the signals' values, then their slopes, at a point.
func (e *Engine) read(v *interval, z *statespace.Point) (read [2 * maxSignals]float64) {
	statespace.Times(read[:2*e.rec.count], v.read, z, e.width)
	return read
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
	if m.legs[0] == loop.High {
		e.run.on += h
	}
	to := m.at + h
	i := e.rec.index(to)
	read := e.read(v, z)
	for k := range e.rec.count {
		f := &e.shape[m.drive][k]
		was, is := e.head[k], reading{read[k], read[e.rec.count+k]}
		e.head[k] = is
		e.keep(k, i, is.value, z, to)
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
		e.keep(k, e.rec.index(at), f.At(&x, e.width), &x, at)
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
	x := &r.buckets[i][k]
	return !x.used || value < x.least || value > x.greatest
}

// keep takes a value of a signal in bucket i.
func (e *Engine) keep(k, i int, value float64, z *statespace.Point, at float64) {
	e.run.keep(k, Sample{at, value})
	if i < 0 {
		return
	}
	x := &e.rec.buckets[i][k]
	if !x.used || value < x.least {
		x.least, x.leastRow = value, e.row(z, at)
	}
	if !x.used || value > x.greatest {
		x.greatest, x.greatRow = value, e.row(z, at)
	}
	x.used = true
}

// finish writes the duty ratio of the period that ends into its rows.
func (r *recorder) finish(period int, duty, began, ended float64) {
	if r.width == 0 {
		return
	}
	first, last := r.index(began), r.index(ended)
	if first < 0 && last < 0 {
		return
	}
	if last < 0 {
		last = len(r.buckets) - 1
	}
	for i := max(0, first); i <= last; i++ {
		for k := range r.buckets[i] {
			x := &r.buckets[i][k]
			for _, row := range [2]*Row{&x.leastRow, &x.greatRow} {
				if row.period == period && x.used {
					row.Duty = duty
				}
			}
		}
	}
}

// Rows returns the record in order of time: the instants of all kept extremes.
// The duty ratio of a period that has not ended is NaN.
func (e *Engine) Rows() []Row {
	var rows []Row
	for _, b := range e.rec.buckets {
		for k := range b {
			if b[k].used {
				rows = append(rows, b[k].leastRow, b[k].greatRow)
			}
		}
	}
	sort.Slice(rows, func(i, j int) bool {
		if rows[i].At != rows[j].At {
			return rows[i].At < rows[j].At
		}
		return rows[i].order < rows[j].order
	})
	kept := 0
	for i := range rows {
		if i == 0 || rows[i].At != rows[kept-1].At || rows[i].Output != rows[kept-1].Output || rows[i].Control != rows[kept-1].Control {
			rows[kept] = rows[i]
			kept++
		}
	}
	return rows[:kept]
}
