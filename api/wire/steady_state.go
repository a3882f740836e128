package wire

import (
	"railproof/calc/quantity"
	"railproof/service"
)

// SteadyStateRequest asks for the exact periodic steady state.
type SteadyStateRequest struct {
	Stage          *Stage  `json:"stage"`
	Point          *Point  `json:"point"`
	WaveformPoints Integer `json:"waveform_points,omitzero"`
}

// SteadyStateAnswer is the exact periodic steady state.
type SteadyStateAnswer struct {
	Head
	Status           string            `json:"status"`
	Stage            *Stage            `json:"stage"`
	Point            *Point            `json:"point"`
	ConductionMode   string            `json:"conduction_mode,omitzero"`
	Quantities       *Quantities       `json:"quantities,omitzero"`
	PartTemperatures []PartTemperature `json:"part_temperatures,omitzero"`
	NearestOperable  *NearestOperable  `json:"nearest_operable,omitzero"`
	Runaway          *Runaway          `json:"runaway,omitzero"`
	Detail           string            `json:"detail,omitzero"`
	Waveforms        *Waveforms        `json:"waveforms,omitzero"`
	Basis
}

// Decode turns the request into the use case's. The error is an *InvalidError.
func (w *SteadyStateRequest) Decode() (*service.SteadyStateRequest, error) {
	d, err := w.Stage.design()
	if err != nil {
		return nil, err
	}
	const at = "/point"
	p, err := w.Point.Decode(at, d.Stage)
	if err != nil {
		return nil, err
	}
	return &service.SteadyStateRequest{Design: *d, Place: service.Place{At: at, Point: p}, WaveformPoints: int(w.WaveformPoints)}, nil
}

// EncodeSteadyState shows the answer.
func EncodeSteadyState(w *SteadyStateRequest, r *service.SteadyStateRequest, a *service.SteadyStateAnswer, head Head) *SteadyStateAnswer {
	o := a.Outcome
	return &SteadyStateAnswer{
		Head: head, Status: o.Status.String(), Stage: w.Stage, Point: w.Point, ConductionMode: modeNames[o.Conduction()],
		Quantities:       encodeQuantities(&o.Quantities, banksOf(r.Design.Stage), func(i quantity.Info) bool { return i.Group == quantity.SteadyState }),
		PartTemperatures: encodeTemperatures(r.Design.Stage, o),
		NearestOperable:  encodeNearest(o.Nearest), Runaway: encodeOnset(o.Onset), Detail: o.Detail,
		Waveforms: encodeWaveform(a.Waveform, o.Quantities[quantity.BridgeVoltage]), Basis: encodeBasis(&a.Basis),
	}
}
