package wire

// ReportsRequest asks for the document that proves a rail.
type ReportsRequest struct {
	RuleChecksRequest
	Title    string   `json:"title,omitzero"`
	Sections []string `json:"sections,omitzero"`
	Samples  *Integer `json:"samples,omitzero"`
	Seed     *Integer `json:"seed,omitzero"`
}

// Setting is what the parts of a report share: the conditions with all their
// defaults, and what the stage can be asked for.
type Setting struct {
	Conditions *Conditions
	HasLoop    bool      // modulator, compensator and feedback
	LoadStep   *LoadStep // of the requirement; nil: none
	Period     float64   // [s] of switching
}

// Decode checks the request as a whole. The error is an *InvalidError.
func (w *ReportsRequest) Decode() (*Setting, error) {
	p, err := w.RuleChecksRequest.Decode()
	if err != nil {
		return nil, err
	}
	s := &Setting{Conditions: EncodeConditions(&p.Conditions), HasLoop: w.Stage.Modulator != nil && w.Stage.Compensator != nil && w.Stage.Feedback != nil}
	s.Period = 1 / p.Design.Stage.SwitchingFrequency
	if t := w.Requirement.Targets; t != nil {
		s.LoadStep = t.LoadStep
	}
	return s, nil
}
