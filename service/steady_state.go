package service

import (
	"context"

	"railproof/calc/caution"
	"railproof/calc/evaluate"
	"railproof/calc/switched"
)

// SteadyStateRequest asks for the exact periodic steady state at one point.
type SteadyStateRequest struct {
	Design         Design
	Place          Place
	WaveformPoints int // instants at which waveforms are given, corners besides; 0: none
}

// SteadyStateAnswer holds the outcome at the point.
type SteadyStateAnswer struct {
	Outcome  *Outcome
	Waveform *switched.Waveform // nil if none was asked for, or there is no solution
	Basis    Basis
}

// SteadyState solves the stage at one point.
func (s *Service) SteadyState(ctx context.Context, r *SteadyStateRequest) (*SteadyStateAnswer, error) {
	a := new(SteadyStateAnswer)
	err := s.run(ctx, interactive, func() error {
		e := s.evaluator(r.Design.Stage)
		defer s.release(e)
		a.Outcome = outcome(e, &r.Place.Point)
		s.done.count(a.Outcome.Status)
		if r.WaveformPoints > 0 && a.Outcome.Status.Figures() {
			var again evaluate.Result
			e.Eval(&r.Place.Point, &again)
			a.Waveform, _ = e.Waveform(r.WaveformPoints)
		}
		a.Basis = s.rests(&r.Design, e, []Place{r.Place}, []*Outcome{a.Outcome}, caution.Seen{})
		return nil
	})
	if err != nil {
		return nil, err
	}
	return a, nil
}
