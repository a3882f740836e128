package transient

import (
	"math"
	"strconv"

	"railproof/calc/loop"
	"railproof/calc/parts"
	"railproof/calc/stage"
	"railproof/calc/switched"
)

// Setup is everything a run needs to know.
type Setup struct {
	Plant      loop.Plant
	Bounds     Bounds
	Start      Start
	Events     []Event
	Duration   float64 // [s]
	Band       float64 // [V] half-width of the band whose re-entry counts as recovery
	Saturation float64 // [A] inductor current that must not be passed; parts.Unknown: no such rating
	Record     Record
}

// Bounds limit what the controller can do.
type Bounds struct {
	MinOn       float64 // [s] least on-time
	MinOff      float64 // [s] least off-time
	MaxDuty     float64 // [1] greatest duty ratio
	ControlLow  float64 // [V] lower limit of the error amplifier's output
	ControlHigh float64 // [V] upper limit; +Inf: none
}

// StartKind tells where a run begins.
type StartKind uint8

const (
	Periodic StartKind = iota // in the periodic closed-loop solution at the operating point
	AtRest                    // no current, output precharged, reference at zero and ramped up
)

// Start is the beginning of a run.
type Start struct {
	Kind      StartKind
	Precharge float64 // [V] output voltage before the start
	SoftStart float64 // [s] over which the reference rises from zero
	LoadFrom  float64 // [V] output voltage at which the constant-current load is connected
}

// EventKind tells what an event changes.
type EventKind uint8

const (
	LoadStep EventKind = iota
	InputStep
	ReferenceStep
	ControlTone // a sine is added to the control voltage at the comparator, from the start of the run
	LoadTone    // to the load current
	InputTone   // to the source voltage; a feed-forward ramp does not follow it
)

func (k EventKind) tone() bool { return k >= ControlTone }

// Event is one disturbance. A ramp at a finite slew begins at At.
type Event struct {
	Kind      EventKind
	At        float64 // [s]
	Change    float64 // [A] or [V], with sign; amplitude of a tone
	Slew      float64 // [A/s] or [V/s] above zero; +Inf or 0: at once
	Frequency float64 // [Hz] of a tone
}

// Record asks for waveforms.
type Record struct {
	From, To float64 // [s] To 0: until the end
	Points   int     // buckets; each keeps the extremes inside it. 0: no waveforms
}

// MaxPoints bounds the size of a record.
const MaxPoints = 20000 // [1]

// DefaultBounds returns the bounds of a controller with the error amplifier's
// limits that go with the plant: down to zero and, in voltage mode, up to 1.2
// times the ramp's amplitude; in peak current mode up to 1.2 times what the
// current limit asks for, or without limit.
func DefaultBounds(c *parts.Controller, p *loop.Plant) Bounds {
	b := Bounds{MinOn: c.MinOnTime, MinOff: c.MinOffTime, MaxDuty: c.MaxDutyRatio, ControlHigh: math.Inf(1)}
	m := &p.Modulator
	switch {
	case m.Mode == parts.VoltageMode:
		b.ControlHigh = headroom * p.RampSlope() * p.Circuit.Period
	case parts.Known(m.CurrentLimit):
		b.ControlHigh = headroom * (m.Sense*m.CurrentLimit + m.Slope*p.Circuit.Period)
	}
	return b
}

const headroom = 1.2 // [1]

// Check reports what makes the run meaningless; the error is a
// *stage.InvalidError.
func (s *Setup) Check() error {
	f := s.Plant.Faults()
	within := func(field string, given, least, greatest float64, detail string) {
		if !(given >= least && given <= greatest) {
			limit := least
			if given > greatest {
				limit = greatest
			}
			f = append(f, stage.Fault{Field: field, Given: given, Limit: limit, Accepted: "from " + number(least) + " to " + number(greatest), Detail: detail})
		}
	}
	period := s.Plant.Circuit.Period
	within("duration_s", s.Duration, period, 1e7*period, "length of the run, at least one period")
	b := &s.Bounds
	within("controller/min_on_time_s", b.MinOn, 0, period, "least on-time")
	within("controller/min_off_time_s", b.MinOff, 0, period, "least off-time")
	within("controller/max_duty_ratio", b.MaxDuty, b.MinOn/period, 1, "greatest duty ratio")
	within("control_high_v", b.ControlHigh, b.ControlLow, math.Inf(1), "limits of the error amplifier")
	within("band_v", s.Band, 0, 1e6, "recovery band")
	if m := &s.Plant.Modulator; parts.Known(m.CurrentLimit) {
		within("modulator/current_limit_a", m.CurrentLimit, 0, math.Inf(1), "current limit")
	}
	if s.Start.Kind == AtRest {
		within("start/precharge_v", s.Start.Precharge, 0, s.Plant.Circuit.Vin, "a precharged output stays below the input")
		within("start/load_from_v", s.Start.LoadFrom, 0, s.Plant.Feedback.OutputVoltage(), "output at which the load starts")
		within("start/soft_start_s", s.Start.SoftStart, 0, s.Duration, "rise time of the reference")
	}
	within("record/points", float64(s.Record.Points), 0, MaxPoints, "waveform points")
	within("record/to_s", s.Record.To, 0, s.Duration, "end of the record")
	within("record/from_s", s.Record.From, 0, s.recordEnd(), "start of the record")
	within("events", float64(len(s.Events)), 0, MaxEvents, "events")
	last, tones := 0.0, 0
	for i := range s.Events {
		e := &s.Events[i]
		at := "events/" + strconv.Itoa(i) + "/"
		within(at+"at_s", e.At, last, s.Duration, "events come in order of time, inside the run")
		last = e.At
		within(at+"slew", e.Slew, 0, math.Inf(1), "slew rate")
		if !(math.Abs(e.Change) <= math.MaxFloat64) {
			f = append(f, stage.Fault{Field: at + "change", Given: e.Change, Limit: parts.Unknown, Accepted: "a finite number", Detail: "size of the step"})
		}
		if e.Kind.tone() {
			tones++
			within(at+"frequency_hz", e.Frequency, 1e-6/period, 0.5/period*float64(s.Plant.Circuit.Phases), "frequency of the tone")
		}
	}
	if tones > 1 {
		f = append(f, stage.Fault{Field: "events", Given: float64(tones), Limit: 1, Accepted: "one tone", Detail: "tones"})
	}
	if len(f) > 0 {
		return &stage.InvalidError{Faults: f}
	}
	return nil
}

// MaxEvents bounds the number of events of a run.
const MaxEvents = 64 // [1]

func (s *Setup) recordEnd() float64 {
	if s.Record.To > 0 {
		return s.Record.To
	}
	return s.Duration
}

func number(x float64) string { return strconv.FormatFloat(x, 'g', 6, 64) }

// blocks reports whether the rectifier of a phase blocks reverse current.
func blocks(c *switched.Circuit, phase int) bool {
	if c.Legs != nil {
		return c.Legs[phase].Rectifier.Blocks
	}
	return c.Leg.Rectifier.Blocks
}
