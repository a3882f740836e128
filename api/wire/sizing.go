package wire

import (
	"railproof/calc/preferred"
	"railproof/calc/sizing"
	"railproof/service"
)

// SizingRequest asks for a stage that meets a requirement.
type SizingRequest struct {
	Requirement *Requirement   `json:"requirement"`
	Choices     *SizingChoices `json:"choices,omitzero"`
}

// SizingChoices say what the draft stage is made of.
type SizingChoices struct {
	InductorSeries  string   `json:"inductor_series,omitzero"`
	CapacitorSeries string   `json:"capacitor_series,omitzero"`
	DividerSeries   string   `json:"divider_series,omitzero"`
	Reference       *float64 `json:"reference_v,omitzero"`
	Lower           *float64 `json:"lower_ohm,omitzero"`
	MinOnTime       *float64 `json:"min_on_time_s,omitzero"`
	MinOffTime      *float64 `json:"min_off_time_s,omitzero"`
	MaxDutyRatio    *float64 `json:"max_duty_ratio,omitzero"`
	OutputKind      string   `json:"output_capacitor_kind,omitzero"`
	InputKind       string   `json:"input_capacitor_kind,omitzero"`
	SweepCount      *Integer `json:"sweep_count,omitzero"`
}

// Decode turns the request into the use case's. The error is an *InvalidError.
func (w *SizingRequest) Decode() (*service.SizingRequest, error) {
	const at = "/requirement"
	requirement, assumed, err := w.Requirement.decode(at)
	if err != nil {
		return nil, err
	}
	return &service.SizingRequest{At: at, Requirement: requirement, Choices: w.Choices.decode(), Assumed: assumed}, nil
}

func (w *SizingChoices) decode() sizing.Choices {
	c := sizing.NewChoices()
	if w == nil {
		return c
	}
	c.InductorSeries, c.CapacitorSeries, c.DividerSeries = seriesOf(w.InductorSeries), seriesOf(w.CapacitorSeries), seriesOf(w.DividerSeries)
	c.Reference, c.LowerOhm = or(w.Reference, c.Reference), or(w.Lower, c.LowerOhm)
	c.MinOnTime, c.MinOffTime, c.MaxDutyRatio = or(w.MinOnTime, c.MinOnTime), or(w.MinOffTime, c.MinOffTime), or(w.MaxDutyRatio, c.MaxDutyRatio)
	c.OutputKind, c.InputKind = capacitorKinds[w.OutputKind], capacitorKinds[w.InputKind]
	if w.SweepCount != nil {
		c.SweepCount = int(*w.SweepCount)
	}
	return c
}

// seriesOf returns the named series; zero, the default, for none.
func seriesOf(name string) preferred.Series {
	s, _ := preferred.ByName(name)
	return s
}
