package wire

import (
	"errors"
	"math"

	"railproof/calc/parts"
	"railproof/calc/stage"
	"railproof/service"
)

// TransientsRequest asks for the closed loop cycle by cycle.
type TransientsRequest struct {
	Stage          *Stage          `json:"stage"`
	Point          *Point          `json:"point"`
	Event          *TransientEvent `json:"event"`
	Duration       *float64        `json:"duration_s,omitzero"`
	Lead           *float64        `json:"lead_s,omitzero"`
	Band           *float64        `json:"band_ratio,omitzero"`
	WaveformPoints *Integer        `json:"waveform_points,omitzero"`
}

// TransientEvent has exactly one member.
type TransientEvent struct {
	LoadStep      *LoadChange    `json:"load_step,omitzero"`
	InputStep     *InputStep     `json:"input_step,omitzero"`
	ReferenceStep *ReferenceStep `json:"reference_step,omitzero"`
	StartUp       *StartUp       `json:"start_up,omitzero"`
}

// LoadChange changes the constant-current load.
type LoadChange struct {
	To        float64  `json:"to_a"`
	Slew      *float64 `json:"slew_a_per_s,omitzero"`
	BackAfter *float64 `json:"back_after_s,omitzero"`
}

// InputStep changes the source voltage.
type InputStep struct {
	To   float64  `json:"to_v"`
	Slew *float64 `json:"slew_v_per_s,omitzero"`
}

// ReferenceStep changes the reference at once.
type ReferenceStep struct {
	To float64 `json:"to_ratio"`
}

// StartUp starts a stage at rest.
type StartUp struct {
	SoftStart float64  `json:"soft_start_s"`
	PreBias   *float64 `json:"pre_bias_v,omitzero"`
	LoadFrom  *float64 `json:"load_from_v,omitzero"`
}

const (
	defaultSlew     = 1e6
	defaultBand     = 0.01
	defaultWaveform = 1000
	eventAt         = "/event"
)

// Decode turns the request into the use case's. The error is an *InvalidError.
func (w *TransientsRequest) Decode() (*service.TransientsRequest, error) {
	if faults := demandLoop(w.Stage); len(faults) > 0 {
		return nil, &InvalidError{faults}
	}
	d, err := w.Stage.design()
	if err != nil {
		return nil, err
	}
	const at = "/point"
	p, err := w.Point.Decode(at, d.Stage)
	faults := faultsOf(err)
	if p.Control.Kind != stage.ByFeedback {
		faults = append(faults, Fault{Pointer: at + "/control", Keyword: "control", Detail: "in closed loop the divider and the reference set the output", Limit: "regulate_by feedback, which is the default"})
	}
	r := &service.TransientsRequest{
		Design: *d, Place: service.Place{At: at, Point: p}, EventAt: eventAt, Duration: or(w.Duration, parts.Unknown), Lead: or(w.Lead, parts.Unknown),
		Band: or(w.Band, defaultBand), Points: whole64(w.WaveformPoints, defaultWaveform),
	}
	r.Event, faults = w.Event.decode(&p, d.Stage, faults)
	if len(faults) > 0 {
		return nil, &InvalidError{faults}
	}
	return r, nil
}

func (e *TransientEvent) decode(p *stage.Point, s *stage.Stage, faults []Fault) (service.Disturbance, []Fault) {
	v := service.Disturbance{BackAfter: parts.Unknown, LoadFrom: parts.Unknown}
	same := func(tail string, to float64) {
		faults = append(faults, Fault{Pointer: eventAt + tail, Keyword: "event", Detail: "this is what the starting point has already: nothing happens", Received: figure(to), Unit: UnitOf(tail)})
	}
	switch {
	case e.LoadStep != nil:
		l := e.LoadStep
		v.Kind, v.To, v.Slew, v.BackAfter = service.LoadStepEvent, l.To, or(l.Slew, defaultSlew), or(l.BackAfter, parts.Unknown)
		if v.To == p.Load.Current {
			same("/load_step/to_a", v.To)
		}
	case e.InputStep != nil:
		v.Kind, v.To, v.Slew = service.InputStepEvent, e.InputStep.To, or(e.InputStep.Slew, defaultSlew)
		if v.To == p.Input {
			same("/input_step/to_v", v.To)
		}
	case e.ReferenceStep != nil:
		v.Kind, v.To = service.ReferenceStepEvent, e.ReferenceStep.To
		if v.To == 1 {
			same("/reference_step/to_ratio", v.To)
		}
		if set := s.Feedback.OutputVoltage(); !(set*v.To < p.Input) {
			faults = append(faults, Fault{Pointer: eventAt + "/reference_step/to_ratio", Keyword: "physics", Detail: "a step-down stage delivers less than its input", Limit: "below " + figure(p.Input/set), Received: figure(v.To), Unit: "1"})
		}
	default:
		u := e.StartUp
		v.Kind, v.SoftStart, v.PreBias, v.LoadFrom = service.StartUpEvent, u.SoftStart, or(u.PreBias, 0), or(u.LoadFrom, parts.Unknown)
	}
	return v, faults
}

// TransientsInvalid turns what the use case refuses into faults of the request; any
// other error passes unchanged.
func TransientsInvalid(err error) error {
	if long, is := errors.AsType[*service.TooLong](err); is {
		return &InvalidError{[]Fault{{
			Pointer: "/duration_s", Keyword: "length", Unit: "s", Received: figure(long.Asked), Limit: "at most " + figure(math.Max(0, long.Most)),
			Detail: "a run has at most 500000 switching periods, what is shown before the event included",
		}}}
	}
	return LoopInvalid(err)
}
