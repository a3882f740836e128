package wire

import (
	"encoding/json"

	"railproof/calc/parts"
	"railproof/calc/stage"
)

// Requirement is what a rail must do.
type Requirement struct {
	Name               string       `json:"name,omitzero"`
	Input              InputRange   `json:"input"`
	Output             Output       `json:"output"`
	Load               LoadAmps     `json:"load"`
	Ambient            AmbientRange `json:"ambient"`
	Rectifier          string       `json:"rectifier,omitzero"`
	PhaseCount         *Integer     `json:"phase_count,omitzero"`
	SwitchingFrequency Frequency    `json:"switching_frequency_hz"`
	Targets            *Targets     `json:"targets,omitzero"`
}

// InputRange is the range of the input voltage.
type InputRange struct {
	Min    float64  `json:"min_v"`
	Typ    *float64 `json:"typ_v,omitzero"`
	Max    float64  `json:"max_v"`
	Source *float64 `json:"source_ohm,omitzero"`
}

// Output is the voltage that is asked for.
type Output struct {
	Voltage   float64  `json:"voltage_v"`
	Tolerance *float64 `json:"tolerance_ratio,omitzero"`
}

// LoadAmps is the range of the load current.
type LoadAmps struct {
	Min *float64 `json:"min_a,omitzero"`
	Typ *float64 `json:"typ_a,omitzero"`
	Max float64  `json:"max_a"`
}

// AmbientRange is the range of the ambient temperature.
type AmbientRange struct {
	Min float64  `json:"min_degc"`
	Typ *float64 `json:"typ_degc,omitzero"`
	Max float64  `json:"max_degc"`
}

// Targets are the limits a stage is sized for.
type Targets struct {
	InductorRippleRatio *float64  `json:"inductor_ripple_ratio,omitzero"`
	OutputRipple        *float64  `json:"output_ripple_pp_v,omitzero"`
	InputRipple         *float64  `json:"input_ripple_pp_v,omitzero"`
	ContinuousDownTo    *float64  `json:"continuous_down_to_a,omitzero"`
	LoadStep            *LoadStep `json:"load_step,omitzero"`
	HoldUp              *HoldUp   `json:"hold_up,omitzero"`
	Efficiency          *float64  `json:"efficiency_ratio,omitzero"`
	Junction            *float64  `json:"junction_degc,omitzero"`
	Life                *float64  `json:"life_s,omitzero"`
}

// LoadStep is a change of load and what the output may do about it.
type LoadStep struct {
	Step      float64  `json:"step_a"`
	Slew      *float64 `json:"slew_a_per_s,omitzero"`
	Deviation *float64 `json:"deviation_v,omitzero"`
	Recovery  *float64 `json:"recovery_s,omitzero"`
}

// HoldUp is how long the output stays above a voltage without input.
type HoldUp struct {
	Time float64 `json:"time_s"`
	To   float64 `json:"to_v"`
}

// Frequency is a fixed switching frequency, or a range to sweep.
type Frequency struct {
	Fixed float64 // [Hz] if Sweep is nil
	Sweep *FrequencyRange
}

// FrequencyRange is a range of switching frequencies.
type FrequencyRange struct {
	Min float64 `json:"min"`
	Max float64 `json:"max"`
}

// MarshalJSON writes what was read.
func (f Frequency) MarshalJSON() ([]byte, error) {
	if f.Sweep != nil {
		return json.Marshal(f.Sweep)
	}
	return json.Marshal(f.Fixed)
}

// UnmarshalJSON reads what was written.
func (f *Frequency) UnmarshalJSON(text []byte) error {
	if len(text) > 0 && text[0] == '{' {
		f.Sweep = new(FrequencyRange)
		return json.Unmarshal(text, f.Sweep)
	}
	return json.Unmarshal(text, &f.Fixed)
}

// ContractValue returns what stands on the wire, for the check of answers.
func (f *Frequency) ContractValue() any {
	if f.Sweep != nil {
		return f.Sweep
	}
	return f.Fixed
}

// decode turns the requirement into calc's form and lists the defaults it used, by
// field ids relative to the requirement. What the targets leave open stays Unknown
// for sizing to decide.
func (w *Requirement) decode(at string) (stage.Requirement, []stage.Assumed, error) {
	var d defaulter
	r := stage.Requirement{
		Name: w.Name, Output: w.Output.Voltage, Rectifier: rectifiers[w.Rectifier], PhaseCount: 1,
		Input:       stage.Range{Min: w.Input.Min, Max: w.Input.Max},
		LoadCurrent: stage.Range{Max: w.Load.Max},
		AmbientDegC: stage.Range{Min: w.Ambient.Min, Max: w.Ambient.Max},
		Targets:     w.Targets.decode(&d),
	}
	if w.PhaseCount != nil {
		r.PhaseCount = int(*w.PhaseCount)
	}
	r.SwitchingFrequency = stage.Range{Min: w.SwitchingFrequency.Fixed, Typ: w.SwitchingFrequency.Fixed, Max: w.SwitchingFrequency.Fixed}
	if s := w.SwitchingFrequency.Sweep; s != nil {
		r.SwitchingFrequency = stage.Range{Min: s.Min, Typ: s.Min + (s.Max-s.Min)/2, Max: s.Max}
	}
	r.Input.Typ = d.or(w.Input.Typ, "input/typ_v", middle(r.Input), r.Input.Min, r.Input.Max, "typical input voltage not given: the midpoint")
	r.SourceResistance = d.or(w.Input.Source, "input/source_ohm", 0, 0, 0.1, "resistance of the source not given: taken as zero")
	r.OutputTolerance = d.or(w.Output.Tolerance, "output/tolerance_ratio", 0.05, 0.02, 0.1, "allowed deviation of the output not given")
	r.LoadCurrent.Min = d.or(w.Load.Min, "load/min_a", 0, 0, 0.1*r.LoadCurrent.Max, "least load not given: taken as none")
	r.LoadCurrent.Typ = d.or(w.Load.Typ, "load/typ_a", middle(r.LoadCurrent), r.LoadCurrent.Min, r.LoadCurrent.Max, "typical load not given: the midpoint")
	r.AmbientDegC.Typ = d.or(w.Ambient.Typ, "ambient/typ_degc", min(max(25, r.AmbientDegC.Min), r.AmbientDegC.Max), r.AmbientDegC.Min, r.AmbientDegC.Max, "typical ambient not given: 25 degC, or the nearer end")
	return r, d.used, Located(r.Check(), at)
}

// decode returns the targets; those not given are Unknown.
func (w *Targets) decode(d *defaulter) stage.Targets {
	u := parts.Unknown
	t := stage.Targets{
		InductorRippleRatio: u, OutputRipple: u, InputRipple: u, ContinuousDownTo: 0, Efficiency: u, JunctionDegC: u, Life: u,
		LoadStep: stage.LoadStep{Slew: u, Deviation: u, Recovery: u},
	}
	if w == nil {
		return t
	}
	t.InductorRippleRatio, t.OutputRipple, t.InputRipple = or(w.InductorRippleRatio, u), or(w.OutputRipple, u), or(w.InputRipple, u)
	t.ContinuousDownTo = or(w.ContinuousDownTo, 0)
	t.Efficiency, t.JunctionDegC, t.Life = asked(w.Efficiency), or(w.Junction, u), asked(w.Life)
	if s := w.LoadStep; s != nil && s.Step > 0 {
		t.LoadStep = stage.LoadStep{
			Step: s.Step, Deviation: or(s.Deviation, u), Recovery: or(s.Recovery, u),
			Slew: d.or(s.Slew, "targets/load_step/slew_a_per_s", 1e6, 1e5, 1e7, "slew of the load step not given"),
		}
	}
	if h := w.HoldUp; h != nil {
		t.HoldUp = stage.HoldUp{Time: h.Time, To: h.To}
	}
	return t
}

// asked returns a target of which zero means that it is not asked.
func asked(v *float64) float64 {
	if v == nil || *v == 0 {
		return parts.Unknown
	}
	return *v
}

// defaulter remembers the defaults that were used.
type defaulter struct{ used []stage.Assumed }

func (d *defaulter) or(given *float64, field string, value, low, high float64, why string) float64 {
	if given != nil {
		return *given
	}
	d.used = append(d.used, stage.Assumed{Field: field, Value: value, Low: low, High: high, Why: why})
	return value
}

func middle(r stage.Range) float64 { return r.Min + (r.Max-r.Min)/2 }
