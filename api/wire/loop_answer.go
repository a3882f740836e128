package wire

import (
	"errors"
	"math"

	"railproof/calc/loop"
	"railproof/calc/parts"
	"railproof/calc/stage"
	"railproof/service"
)

// LoopGainAnswer is the loop of a stage at each point; with synthesis, of the
// stage with the preferred compensator, which it contains.
type LoopGainAnswer struct {
	Head
	Status    string           `json:"status"`
	Stage     *Stage           `json:"stage"`
	Synthesis *SynthesisAnswer `json:"synthesis,omitzero"`
	Items     []LoopItem       `json:"items"`
	Basis
}

// SynthesisAnswer is a designed compensator, before and after rounding.
type SynthesisAnswer struct {
	Ideal            *Compensator `json:"ideal"`
	Preferred        *Compensator `json:"preferred"`
	IdealCrossover   *float64     `json:"ideal_crossover_hz,omitzero"`
	IdealPhaseMargin *float64     `json:"ideal_phase_margin_deg,omitzero"`
	Crossover        *float64     `json:"crossover_hz,omitzero"`
	PhaseMargin      *float64     `json:"phase_margin_deg,omitzero"`
	PhaseBoost       *float64     `json:"phase_boost_deg,omitzero"`
	PlantGain        *float64     `json:"plant_gain_db,omitzero"`
	PlantPhase       *float64     `json:"plant_phase_deg,omitzero"`
}

// LoopItem is the loop at one operating point. A margin that does not exist is
// absent.
type LoopItem struct {
	Status          string             `json:"status"`
	Point           *Point             `json:"point"`
	ConductionMode  string             `json:"conduction_mode,omitzero"`
	NearestOperable *NearestOperable   `json:"nearest_operable,omitzero"`
	Stability       string             `json:"stability,omitzero"`
	Crossing        string             `json:"crossing,omitzero"`
	SpectralRadius  *float64           `json:"spectral_radius_ratio,omitzero"`
	DominantAt      *float64           `json:"dominant_hz,omitzero"`
	Crossovers      []Crossover        `json:"crossovers,omitzero"`
	PhaseCrossings  []PhaseCrossing    `json:"phase_crossings,omitzero"`
	Crossover       *float64           `json:"crossover_hz,omitzero"`
	PhaseMargin     *float64           `json:"phase_margin_deg,omitzero"`
	GainMargin      *float64           `json:"gain_margin_db,omitzero"`
	GainReduction   *float64           `json:"gain_reduction_db,omitzero"`
	ModulusMargin   *float64           `json:"modulus_margin_ratio,omitzero"`
	ModulusMarginAt *float64           `json:"modulus_margin_at_hz,omitzero"`
	Bandwidth       *float64           `json:"bandwidth_hz,omitzero"`
	Conditional     *bool              `json:"conditionally_stable,omitzero"`
	DirectError     *float64           `json:"direct_error_ratio,omitzero"`
	ImpedancePeak   *float64           `json:"output_impedance_peak_ohm,omitzero"`
	ImpedancePeakAt *float64           `json:"output_impedance_peak_at_hz,omitzero"`
	CurrentLoop     *CurrentLoop       `json:"current_loop,omitzero"`
	Source          *SourceInteraction `json:"source,omitzero"`
	Remarks         []LoopRemark       `json:"remarks,omitzero"`
	ModelDeviation  []ModelDeviation   `json:"model_deviation,omitzero"`
	AveragedGoodTo  *float64           `json:"averaged_good_to_hz,omitzero"`
	Curves          *LoopCurves        `json:"curves,omitzero"`
	Detail          string             `json:"detail,omitzero"`
}

// Crossover is a frequency at which the loop gain is 1.
type Crossover struct {
	Frequency   float64 `json:"frequency_hz"`
	PhaseMargin float64 `json:"phase_margin_deg"`
	Falling     bool    `json:"falling"`
}

// PhaseCrossing is a frequency at which the loop gain is negative real.
type PhaseCrossing struct {
	Frequency  float64 `json:"frequency_hz"`
	GainMargin float64 `json:"gain_margin_db"`
}

// CurrentLoop is the loop of the current in peak current mode.
type CurrentLoop struct {
	Stable          bool     `json:"stable"`
	Eigenvalue      float64  `json:"eigenvalue_ratio"`
	IdealEigenvalue *float64 `json:"ideal_eigenvalue_ratio,omitzero"`
	Quality         *float64 `json:"quality_ratio,omitzero"`
	RiseSlope       *float64 `json:"rise_slope_v_per_s,omitzero"`
	FallSlope       *float64 `json:"fall_slope_v_per_s,omitzero"`
	Slope           *float64 `json:"slope_v_per_s,omitzero"`
	SlopeNeeded     float64  `json:"slope_needed_v_per_s"`
}

// SourceInteraction is what source and loop do to each other.
type SourceInteraction struct {
	Stability     string   `json:"stability"`
	Null          *float64 `json:"null_separation_db,omitzero"`
	NullAt        *float64 `json:"null_at_hz,omitzero"`
	Driving       *float64 `json:"driving_separation_db,omitzero"`
	DrivingAt     *float64 `json:"driving_at_hz,omitzero"`
	Input         *float64 `json:"input_separation_db,omitzero"`
	InputAt       *float64 `json:"input_at_hz,omitzero"`
	PhaseMargin   *float64 `json:"phase_margin_deg,omitzero"`
	ModulusMargin *float64 `json:"modulus_margin_ratio,omitzero"`
	Detail        string   `json:"detail,omitzero"`
}

// LoopRemark is one observation about a loop, with what it points at.
type LoopRemark struct {
	Topic   string   `json:"topic"`
	Pointer string   `json:"pointer"`
	Value   float64  `json:"value"`
	Limit   *float64 `json:"limit,omitzero"`
	Unit    string   `json:"unit"`
	Detail  string   `json:"detail"`
}

// ModelDeviation is how far the averaged model is from the exact one.
type ModelDeviation struct {
	Frequency float64 `json:"frequency_hz"`
	Gain      float64 `json:"gain_ratio"`
	Phase     float64 `json:"phase_deg"`
	Stage     float64 `json:"stage_ratio"`
}

// Verdict is the status of the answer as a whole.
func (a *LoopGainAnswer) Verdict() string { return a.Status }

var stabilities = map[loop.Stability]string{loop.Stable: "stable", loop.Unstable: "unstable"}

var crossings = map[loop.Crossed]string{loop.Crosses: "crosses", loop.AlwaysBelow: "always-below", loop.AlwaysAbove: "always-above", loop.OnlyRises: "only-rises"}

// topics name the remarks, with the unit of their numbers.
var topics = map[loop.Topic]struct{ name, unit string }{
	loop.LoopUnstable: {"unstable", "1"}, loop.CurrentAlternates: {"current-alternates", "V/s"}, loop.LowerGainUnstable: {"lower-gain-unstable", "dB"},
	loop.NoCrossover: {"no-crossover", "1"}, loop.LittlePhase: {"little-phase", "deg"}, loop.ZerosTooHigh: {"zeros-too-high", "Hz"},
	loop.CrossoverTooHigh: {"crossover-too-high", "Hz"}, loop.CrossoverTooLow: {"crossover-too-low", "Hz"}, loop.AmplifierTooSlow: {"amplifier-too-slow", "Hz"},
	loop.LittleDirectGain: {"little-direct-gain", "1"},
}

// EncodeLoopGain shows the answer.
func EncodeLoopGain(w *LoopGainRequest, r *service.LoopRequest, a *service.LoopAnswer, head Head) *LoopGainAnswer {
	out := &LoopGainAnswer{Head: head, Status: a.Status.String(), Stage: w.Stage, Items: make([]LoopItem, len(a.Items)), Basis: encodeBasis(&a.Basis)}
	if a.Design != nil {
		out.Synthesis = encodeSynthesis(w, a.Design)
		st := *w.Stage
		st.Compensator = out.Synthesis.Preferred
		out.Stage = &st
	}
	for i, p := range w.list() {
		out.Items[i] = encodeLoopItem(p, r, a.Items[i], w.Curves == nil || *w.Curves)
	}
	return out
}

func encodeSynthesis(w *LoopGainRequest, d *loop.Design) *SynthesisAnswer {
	s := &SynthesisAnswer{
		Ideal: w.Synthesis.network(w.Stage.Compensator, &d.Exact), Preferred: w.Synthesis.network(w.Stage.Compensator, &d.Compensator),
		IdealCrossover: known(&d.ExactMargins.Crossover), IdealPhaseMargin: known(&d.ExactMargins.PhaseMargin),
		Crossover: known(&d.Margins.Crossover), PhaseMargin: known(&d.Margins.PhaseMargin),
		PhaseBoost: known(&d.Boost), PlantPhase: known(&d.StagePhase),
	}
	gain := decibels(d.StageGain)
	s.PlantGain = &gain
	return s
}

// network shows a designed compensator; its amplifier as the request gave it.
func (s *LoopSynthesis) network(own *Compensator, c *parts.Compensator) *Compensator {
	w := s.amplifier(own)
	w.FeedbackF = Of(c.FeedbackF)
	if c.Type != parts.OpAmpType1 {
		w.FeedbackOhm, w.ShuntF = Of(c.FeedbackOhm), Of(c.ShuntF)
	}
	if c.Type == parts.OpAmpType3 || c.Type == parts.TransconductanceType3 {
		w.LeadOhm, w.LeadF = Of(c.LeadOhm), Of(c.LeadF)
	}
	return w
}

func encodeLoopItem(p *Point, r *service.LoopRequest, x *service.LoopItem, curves bool) LoopItem {
	m := &x.Margins
	w := LoopItem{Status: x.Status.String(), Point: p, ConductionMode: modeNames[x.Outcome.Conduction()], NearestOperable: encodeNearest(x.Outcome.Nearest), Detail: x.Detail}
	if !x.Analysis.OK() {
		return w
	}
	w.Stability, w.Crossing = stabilities[m.Stability], crossings[m.Crossed]
	w.SpectralRadius, w.DominantAt = known(&m.SpectralRadius), oscillation(m)
	w.Crossovers = make([]Crossover, min(m.CrossoverCount, loop.MaxCrossovers))
	for i := range w.Crossovers {
		c := &m.Crossovers[i]
		w.Crossovers[i] = Crossover{c.Frequency, c.Margin, c.Falls}
	}
	w.PhaseCrossings = make([]PhaseCrossing, min(m.PhaseCount, loop.MaxPhaseCrossings))
	for i := range w.PhaseCrossings {
		c := &m.PhaseCrossings[i]
		w.PhaseCrossings[i] = PhaseCrossing{c.Frequency, c.Margin}
	}
	phase, gain, modulus := m.Reliable()
	w.Crossover, w.PhaseMargin, w.GainMargin = known(&m.Crossover), known(&phase), known(&gain)
	w.ModulusMargin, w.ModulusMarginAt = known(&modulus), known(&m.ModulusAt)
	if m.Stability == loop.Stable {
		w.GainReduction, w.Bandwidth = known(&m.GainReduction), known(&m.Bandwidth)
	}
	w.Conditional, w.DirectError = &m.Conditional, known(&x.DirectError)
	w.ImpedancePeak, w.ImpedancePeakAt = known(&x.Impedance.Value), known(&x.Impedance.At)
	if c := x.Current; c != nil {
		w.CurrentLoop = &CurrentLoop{
			Stable: !m.Subharmonic, Eigenvalue: real(m.CurrentLoop), IdealEigenvalue: known(&c.Eigenvalue), Quality: known(&c.Quality),
			RiseSlope: known(&c.RiseSlope), FallSlope: known(&c.FallSlope), Slope: &x.Slope, SlopeNeeded: c.LeastSlope,
		}
	}
	w.Source = encodeSource(x)
	for i := range x.Remarks {
		o := &x.Remarks[i]
		w.Remarks = append(w.Remarks, LoopRemark{topics[o.Topic].name, "/stage/" + o.Field, o.Value, known(&o.Limit), topics[o.Topic].unit, o.Detail})
	}
	for i := range x.Deviation {
		w.ModelDeviation = append(w.ModelDeviation, deviationOf(&x.Deviation[i]))
	}
	if x.Agreement.GoodTo > 0 {
		w.AveragedGoodTo = &x.Agreement.GoodTo
	}
	if curves {
		w.Curves = encodeCurves(r, x)
	}
	return w
}

// oscillation returns the frequency of the dominant eigenvalue; a real one, of which
// rounding leaves a trace, does not oscillate.
func oscillation(m *loop.Margins) *float64 {
	at := m.DominantAt
	if at < 1e-6*m.LowestFrequency {
		at = 0
	}
	return &at
}

// known returns the number's place, or nil for one that is unknown or without bound:
// a stage without load has no negative input resistance that a source could meet.
func known(v *float64) *float64 {
	if math.IsInf(*v, 0) {
		return nil
	}
	return given(v)
}

func encodeSource(x *service.LoopItem) *SourceInteraction {
	s := x.Source
	if s == nil {
		return nil
	}
	m := &s.Separate
	w := &SourceInteraction{
		Null: known(&m.Null), NullAt: known(&m.NullAt), Driving: known(&m.Driving), DrivingAt: known(&m.DrivingAt), Input: known(&m.Input), InputAt: known(&m.InputAt),
		Detail: "the source impedance stays 6 dB or more below the input impedances, the customary separation",
	}
	if !s.Analysis.OK() {
		w.Stability = stabilities[loop.Unstable]
		w.Detail = "not shown to be stable: the loop with this source has no periodic solution that could be analysed"
		return w
	}
	phase, _, modulus := s.Loop.Reliable()
	w.Stability, w.PhaseMargin, w.ModulusMargin = stabilities[s.Loop.Stability], known(&phase), known(&modulus)
	switch close := math.Min(math.Min(m.Null, m.Driving), m.Input) < loop.Customary; {
	case x.Margins.Stability != loop.Stable:
		w.Detail = "the loop is unstable from a stiff source already"
	case s.Loop.Stability != loop.Stable:
		w.Detail = "the loop is unstable behind this source: lower its impedance where it comes close to the input impedance, by damping it"
	case close:
		w.Detail = "the source impedance comes within 6 dB of an input impedance; the exact test says that the loop stays stable"
	}
	return w
}

func deviationOf(b *loop.Bode) ModelDeviation {
	q := b.Averaged.Loop / b.Sampled.Loop
	return ModelDeviation{b.Frequency, math.Hypot(real(q), imag(q)) - 1, math.Atan2(imag(q), real(q)) * 180 / math.Pi, b.Deviation}
}

// LoopInvalid turns what the use cases of loop and transients refuse into faults
// of the request; any other error passes unchanged.
func LoopInvalid(err error) error {
	if e, is := errors.AsType[*stage.InvalidError](err); is {
		faults := physicalFaults(e, "")
		for i := range faults {
			f := &faults[i]
			f.Pointer = loopPointer(f.Pointer)
			f.Unit = UnitOf(f.Pointer)
		}
		return &InvalidError{faults}
	}
	if e, is := errors.AsType[*service.UnreachableTarget](err); is {
		at := loopPointer("/" + e.Field)
		return &InvalidError{[]Fault{{Pointer: at, Keyword: "unreachable", Detail: e.Detail + "; what can be reached is " + e.Reachable(), Limit: e.Reachable(), Received: figure(e.Asked), Unit: UnitOf(at)}}}
	}
	if e, is := errors.AsType[*service.NotRegulating](err); is {
		return &InvalidError{[]Fault{{Pointer: e.At, Keyword: "operating-point", Detail: "the stage does not regulate here, so there is no loop to design for: " + e.Detail, Received: e.Status.String()}}}
	}
	return err
}
