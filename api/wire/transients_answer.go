package wire

import (
	"math"

	"railproof/calc/parts"
	"railproof/calc/transient"
	"railproof/service"
)

// TransientsAnswer is the closed loop, cycle by cycle.
type TransientsAnswer struct {
	Head
	Status          string              `json:"status"`
	Stage           *Stage              `json:"stage"`
	Point           *Point              `json:"point"`
	Event           *TransientEvent     `json:"event"`
	Detail          string              `json:"detail,omitzero"`
	NearestOperable *NearestOperable    `json:"nearest_operable,omitzero"`
	Cycles          Integer             `json:"cycles"`
	Duration        *float64            `json:"duration_s,omitzero"`
	Band            *float64            `json:"band_v,omitzero"`
	Before          *float64            `json:"before_v,omitzero"`
	After           *float64            `json:"after_v,omitzero"`
	Expected        *float64            `json:"expected_after_v,omitzero"`
	Down            *float64            `json:"deviation_down_v,omitzero"`
	DownAt          *float64            `json:"deviation_down_at_s,omitzero"`
	Up              *float64            `json:"deviation_up_v,omitzero"`
	UpAt            *float64            `json:"deviation_up_at_s,omitzero"`
	Least           *float64            `json:"output_least_v,omitzero"`
	Greatest        *float64            `json:"output_greatest_v,omitzero"`
	Overshoot       *float64            `json:"overshoot_ratio,omitzero"`
	Recovered       *bool               `json:"recovered,omitzero"`
	Recovery        *float64            `json:"recovery_s,omitzero"`
	InductorPeak    *float64            `json:"inductor_peak_a,omitzero"`
	InductorValley  *float64            `json:"inductor_valley_a,omitzero"`
	Saturation      *float64            `json:"saturation_a,omitzero"`
	Saturated       *bool               `json:"saturated,omitzero"`
	Limited         *Integer            `json:"current_limit_cycles,omitzero"`
	GreatestDuty    *Integer            `json:"greatest_duty_cycles,omitzero"`
	Skipped         *Integer            `json:"skipped_cycles,omitzero"`
	Settled         *bool               `json:"settled,omitzero"`
	Alternates      *bool               `json:"alternates,omitzero"`
	Modes           []string            `json:"conduction_modes,omitzero"`
	Waveforms       *TransientWaveforms `json:"waveforms,omitzero"`
	Basis
}

// TransientWaveforms hold the record, columnar; at a jump an instant stands twice.
type TransientWaveforms struct {
	Time      []float64   `json:"time_s"`
	Output    []float64   `json:"output_v"`
	Inductor  [][]float64 `json:"inductor_a"`
	Load      []float64   `json:"load_a"`
	Input     []float64   `json:"input_v,omitzero"`
	Duty      []float64   `json:"duty_ratio"`
	Control   []float64   `json:"control_v"`
	Reference []float64   `json:"reference_v,omitzero"`
}

// Verdict is the status of the answer.
func (a *TransientsAnswer) Verdict() string { return a.Status }

// EncodeTransients shows the answer.
func EncodeTransients(w *TransientsRequest, a *service.TransientsAnswer, head Head) *TransientsAnswer {
	out := &TransientsAnswer{
		Head: head, Status: a.Status, Stage: w.Stage, Point: w.Point, Event: w.Event, Detail: a.Detail,
		NearestOperable: encodeNearest(a.Outcome.Nearest), Basis: encodeBasis(&a.Basis),
	}
	if !a.Ran {
		return out
	}
	x := &a.Seen
	recovered, known := parts.Known(x.Recovery), parts.Known(a.Rating)
	out.Cycles, out.Duration, out.Band = Integer(a.Run.Periods), &a.Duration, &a.Band
	out.Before, out.After, out.Expected = given(&x.Before), given(&x.After), given(&a.Expected)
	out.Down, out.Up, out.Overshoot = given(&x.Down), given(&x.Up), given(&x.Overshoot)
	if x.Down > 0 {
		out.DownAt = &x.Least.At
	}
	if x.Up > 0 {
		out.UpAt = &x.Greatest.At
	}
	out.Least, out.Greatest = given(&x.Least.Value), given(&x.Greatest.Value)
	out.Recovered, out.Recovery = &recovered, given(&x.Recovery)
	out.InductorPeak, out.InductorValley = given(&x.Peak), given(&x.Valley)
	if known {
		out.Saturation, out.Saturated = &a.Rating, &x.Saturates
	}
	out.Limited, out.GreatestDuty, out.Skipped = whole(x.Limited), whole(x.AtMaxDuty), whole(x.Skipped)
	out.Settled, out.Alternates = &a.Run.Settled, &a.Run.Alternates
	if x.Continuous {
		out.Modes = append(out.Modes, "continuous")
	}
	if x.Discontinuous {
		out.Modes = append(out.Modes, "discontinuous")
	}
	out.Waveforms = encodeRows(a)
	return out
}

// timeDigits keep instants of a run apart that lie within one switching period.
const timeDigits = 10

// encodeRows shows the record. The load is what constant current and resistor draw
// together. A duty ratio stands for the whole of its period; what lies behind the
// last whole one keeps the last that is known.
func encodeRows(a *service.TransientsAnswer) *TransientWaveforms {
	rows := a.Rows
	if len(rows) == 0 {
		return nil
	}
	column := func(value func(r *transient.Row) float64) []float64 {
		list := make([]float64, len(rows))
		for i := range rows {
			list[i] = value(&rows[i])
		}
		return list
	}
	duty := 0.0
	w := &TransientWaveforms{
		Time:   roundedTo(column(func(r *transient.Row) float64 { return r.At - a.Lead }), timeDigits),
		Output: waveform(column(func(r *transient.Row) float64 { return r.Output })),
		Load:   waveform(column(func(r *transient.Row) float64 { return r.Load + a.Resistive*r.Output })),
		Input:  waveform(column(func(r *transient.Row) float64 { return r.Input })),
		Duty: waveform(column(func(r *transient.Row) float64 {
			if !math.IsNaN(r.Duty) {
				duty = r.Duty
			}
			return duty
		})),
		Control:   waveform(column(func(r *transient.Row) float64 { return r.Control })),
		Reference: waveform(column(func(r *transient.Row) float64 { return r.Reference })),
	}
	for i := range a.Phases {
		w.Inductor = append(w.Inductor, waveform(column(func(r *transient.Row) float64 { return r.Inductor[i] })))
	}
	return w
}
