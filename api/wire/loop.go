package wire

import (
	"math"
	"strconv"

	"railproof/calc/loop"
	"railproof/calc/parts"
	"railproof/calc/preferred"
	"railproof/calc/stage"
	"railproof/calc/switched"
	"railproof/service"
)

// LoopGainRequest asks for the loop at one point or at a list, with the
// compensator given or with one to be designed.
type LoopGainRequest struct {
	Stage       *Stage         `json:"stage"`
	Point       *Point         `json:"point,omitzero"`
	Points      []*Point       `json:"points,omitzero"`
	Synthesis   *LoopSynthesis `json:"synthesis,omitzero"`
	Filter      *InputFilter   `json:"input_filter,omitzero"`
	Frequencies *FrequencyGrid `json:"frequencies,omitzero"`
	Curves      *bool          `json:"curves,omitzero"`
}

// LoopSynthesis is what a compensator must achieve.
type LoopSynthesis struct {
	Type             string   `json:"type"`
	Crossover        float64  `json:"crossover_hz"`
	PhaseMargin      float64  `json:"phase_margin_deg"`
	Series           string   `json:"series,omitzero"`
	GainBandwidth    *float64 `json:"gain_bandwidth_hz,omitzero"`
	OpenLoopGain     *float64 `json:"open_loop_gain_ratio,omitzero"`
	Transconductance *float64 `json:"transconductance_s,omitzero"`
	OutputOhm        *float64 `json:"output_ohm,omitzero"`
}

// InputFilter stands between source and input capacitors.
type InputFilter struct {
	Inductance         float64  `json:"inductance_h"`
	DCResistance       *float64 `json:"dc_resistance_ohm,omitzero"`
	Capacitance        float64  `json:"capacitance_f"`
	ESR                float64  `json:"esr_ohm"`
	DampingCapacitance *float64 `json:"damping_capacitance_f,omitzero"`
	DampingInductance  *float64 `json:"damping_inductance_h,omitzero"`
	Damping            *float64 `json:"damping_ohm,omitzero"`
}

// FrequencyGrid holds frequencies in equal ratios.
type FrequencyGrid struct {
	From  *float64 `json:"from_hz,omitzero"`
	To    *float64 `json:"to_hz,omitzero"`
	Count *Integer `json:"count,omitzero"`
}

const (
	defaultFrequencies = 300
	lowestShare        = 1e-4 // of the switching frequency: where curves begin by default
)

// Decode turns the request into the use case's. The error is an *InvalidError.
func (w *LoopGainRequest) Decode() (*service.LoopRequest, error) {
	if (w.Point == nil) == (w.Points == nil) {
		return nil, &InvalidError{[]Fault{{Pointer: "", Keyword: "form", Detail: "exactly one of point and points is given"}}}
	}
	st, target, faults := w.target()
	if len(faults) == 0 {
		faults = demandLoop(st)
	}
	if len(faults) > 0 {
		return nil, &InvalidError{faults}
	}
	d, err := st.design()
	if err != nil {
		return nil, err
	}
	r := &service.LoopRequest{Design: *d, Target: target}
	for i, p := range w.list() {
		at := "/point"
		if w.Points != nil {
			at = "/points/" + strconv.Itoa(i)
		}
		point, err := p.Decode(at, d.Stage)
		faults = append(faults, faultsOf(err)...)
		if point.Control.Kind == stage.FixedDuty {
			faults = append(faults, Fault{Pointer: at + "/control/duty_ratio", Keyword: "control", Detail: "the loop sets the duty ratio; regulate by feedback or to a voltage", Limit: "regulate_by or regulate_to_v"})
		}
		r.Places = append(r.Places, service.Place{At: at, Point: point})
	}
	r.Filter, faults = w.Filter.decode(faults)
	r.Frequencies, faults = w.Frequencies.decode(d.Stage, faults)
	if len(faults) > 0 {
		return nil, &InvalidError{faults}
	}
	return r, nil
}

func (w *LoopGainRequest) list() []*Point {
	if w.Points != nil {
		return w.Points
	}
	return []*Point{w.Point}
}

// demandLoop points at what of the loop a stage does not have.
func demandLoop(w *Stage) (faults []Fault) {
	need := func(name string, missing bool) {
		if missing {
			faults = append(faults, Fault{Pointer: "/stage/" + name, Keyword: "required", Detail: "required for the control loop"})
		}
	}
	need("modulator", w.Modulator == nil)
	need("compensator", w.Compensator == nil)
	need("feedback", w.Feedback == nil)
	if m := w.Modulator; m != nil && m.FeedForward != nil && *m.FeedForward && m.FeedForwardAt == nil && m.Mode == "voltage" {
		need("modulator/feed_forward_at_v", true)
	}
	return faults
}

// target returns the stage to be read and what its compensator is to be designed
// for, nil where it is given. A stage whose compensator is designed gets the
// wanted amplifier and, until then, parts that any network has.
func (w *LoopGainRequest) target() (*Stage, *loop.Target, []Fault) {
	s := w.Synthesis
	if s == nil {
		return w.Stage, nil, nil
	}
	t := &loop.Target{Crossover: s.Crossover, PhaseMargin: s.PhaseMargin, Type: compensatorTypes[s.Type]}
	resistors := seriesOf(s.Series)
	if resistors == 0 {
		resistors = preferred.E24
	}
	t.Rounding = loop.Rounding{Resistors: resistors, Capacitors: min(resistors, preferred.E24)}
	st := *w.Stage
	st.Compensator = s.amplifier(w.Stage.Compensator)
	if isTransconductance(s.Type) && st.Compensator.Transconductance == nil {
		return nil, nil, []Fault{{Pointer: "/synthesis/transconductance_s", Keyword: "required", Detail: "a transconductance amplifier has one, and the stage's compensator gives none", Unit: "S"}}
	}
	const anyOhm, anyF = 1e3, 1e-9
	c := st.Compensator
	c.FeedbackF = Of(anyF)
	if s.Type != "op-amp-1" {
		c.FeedbackOhm = Of(anyOhm)
	}
	if s.Type == "op-amp-3" || s.Type == "transconductance-3" {
		c.LeadOhm, c.LeadF = Of(anyOhm), Of(anyF)
	}
	return &st, t, nil
}

func isTransconductance(name string) bool {
	return compensatorTypes[name] >= parts.TransconductanceType2
}

// amplifier returns a compensator of the wanted type with its amplifier alone:
// as wanted, else as the stage's own where that is of the same kind.
func (s *LoopSynthesis) amplifier(own *Compensator) *Compensator {
	c := &Compensator{Type: s.Type}
	if own == nil || isTransconductance(own.Type) != isTransconductance(s.Type) {
		own = new(Compensator)
	}
	choose := func(wanted *float64, present *Number) *Number {
		if wanted != nil {
			return Of(*wanted)
		}
		return present
	}
	if isTransconductance(s.Type) {
		c.Transconductance, c.OutputOhm = choose(s.Transconductance, own.Transconductance), choose(s.OutputOhm, own.OutputOhm)
	} else {
		c.GainBandwidth, c.OpenLoopGain = choose(s.GainBandwidth, own.GainBandwidth), choose(s.OpenLoopGain, own.OpenLoopGain)
	}
	return c
}

// decode returns the filter as a source; without input banks and without what lies
// before it.
func (f *InputFilter) decode(faults []Fault) (*loop.Source, []Fault) {
	if f == nil {
		return nil, faults
	}
	s := &loop.Source{Present: true, Inductance: f.Inductance, Resistance: or(f.DCResistance, 0)}
	add := func(c, esr float64) {
		s.Shunt[s.Shunts] = switched.Bank{C: c, ESR: esr}
		s.Shunts++
	}
	add(f.Capacitance, f.ESR)
	switch {
	case f.Damping == nil && (f.DampingCapacitance != nil || f.DampingInductance != nil):
		faults = append(faults, Fault{Pointer: "/input_filter/damping_ohm", Keyword: "required", Detail: "a damping branch has a resistor", Unit: "Ohm"})
	case f.DampingCapacitance != nil && f.DampingInductance != nil:
		faults = append(faults, Fault{Pointer: "/input_filter/damping_inductance_h", Keyword: "form", Detail: "the filter is damped across the inductor or across the capacitor, not both"})
	case f.DampingCapacitance != nil:
		add(*f.DampingCapacitance, *f.Damping)
	case f.DampingInductance != nil:
		s.Damping, s.DampH, s.DampOhm = loop.AcrossInductor, *f.DampingInductance, *f.Damping
	case f.Damping != nil:
		faults = append(faults, Fault{Pointer: "/input_filter/damping_ohm", Keyword: "form", Detail: "the resistor stands in series with damping_capacitance_f or damping_inductance_h; neither is given"})
	}
	return s, faults
}

// decode returns the frequencies of the curves.
func (g *FrequencyGrid) decode(s *stage.Stage, faults []Fault) ([]float64, []Fault) {
	if g == nil {
		g = new(FrequencyGrid)
	}
	highest := s.SwitchingFrequency / 2 * float64(max(1, s.PhaseCount))
	from, to := or(g.From, lowestShare*s.SwitchingFrequency), or(g.To, highest)
	if to > highest {
		faults = append(faults, Fault{Pointer: "/frequencies/to_hz", Keyword: "maximum", Detail: "above half the rate at which the comparators decide a loop gain repeats", Limit: "at most " + figure(highest), Received: figure(to), Unit: "Hz"})
	} else if !(from < to) {
		faults = append(faults, Fault{Pointer: "/frequencies/from_hz", Keyword: "order", Detail: "the lowest frequency lies below the highest", Limit: "below " + figure(to), Received: figure(from), Unit: "Hz"})
	}
	list := make([]float64, whole64(g.Count, defaultFrequencies))
	loop.Frequencies(list, from, math.Max(from, to))
	list[len(list)-1] = to
	return list, faults
}
