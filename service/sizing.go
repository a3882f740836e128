package service

import (
	"context"

	"railproof/calc/caution"
	"railproof/calc/evaluate"
	"railproof/calc/sizing"
	"railproof/calc/spread"
	"railproof/calc/stage"
)

// SizingRequest asks for a stage that meets a requirement.
type SizingRequest struct {
	At          string // pointer of the requirement in the request: "/requirement"
	Requirement stage.Requirement
	Choices     sizing.Choices
	Assumed     []stage.Assumed // defaults of the requirement itself, by its field ids
}

// SizingAnswer is what sizing says, and what it rests on.
type SizingAnswer struct {
	sizing.Answer
	Basis Basis
}

// Sizing sizes a stage at each switching frequency that the requirement asks for,
// chooses one, and checks the draft on the exact engine.
func (s *Service) Sizing(ctx context.Context, r *SizingRequest) (*SizingAnswer, error) {
	a := new(SizingAnswer)
	err := s.run(ctx, bulk, func() error {
		frequencies := sizing.Frequencies(&r.Requirement, r.Choices)
		answers := make([]sizing.Answer, len(frequencies))
		err := inChunks(ctx, s.cores, len(answers), 1, s.workers, noWorkspace, keepNothing, func(_ struct{}, from, _ int) {
			answers[from] = s.sized(ctx, &r.Requirement, r.Choices, frequencies[from])
		})
		if err != nil {
			return err
		}
		a.Answer = sizing.Select(&r.Requirement, answers)
		if err := polled(ctx, s.cores, a.Verifying); err != nil {
			return err
		}
		if err := polled(ctx, s.cores, a.VerifyingStep(&r.Requirement)); err != nil {
			return err
		}
		a.Basis.Assumptions, err = s.sizingAssumptions(ctx, r, &a.Answer)
		s.sizingRests(r, a)
		return err
	})
	if err != nil {
		return nil, err
	}
	return a, nil
}

// sized is sizing.SizeAt by a worker in its turn, which it passes on between the
// pieces. It leaves with its caller; what it returns then is no answer.
func (s *Service) sized(ctx context.Context, r *stage.Requirement, choices sizing.Choices, frequency float64) (a sizing.Answer) {
	for range sizing.InPieces(r, choices, frequency, &a) {
		if ctx.Err() != nil {
			break
		}
		s.cores.next()
	}
	return a
}

func noWorkspace() struct{} { return struct{}{} }

func keepNothing(struct{}) {}

// rests gathers cautions and warnings.
func (s *Service) sizingRests(r *SizingRequest, a *SizingAnswer) {
	var seen caution.Seen
	seen.AddRequirement(r.At, &r.Requirement)
	if a.Stage != nil {
		var result evaluate.Result
		e := s.evaluator(a.Stage)
		defer s.release(e)
		e.Eval(&a.Point, &result)
		seen.Add("/point", a.Stage, &a.Point, &result)
		a.Basis.Cautions = caution.Of(a.Stage, "/stage", a.Spreads, &seen)
	} else {
		a.Basis.Cautions = caution.Of(bare(&r.Requirement), "/stage", []spread.Variable{}, &seen)
	}
	for _, n := range a.Notes {
		a.Basis.Warnings = append(a.Basis.Warnings, Warning{Code: n.Code, Pointer: fieldPointer(r.At, n.Field), Detail: n.Detail})
	}
}

// bare is a stage of which only the kind is known.
func bare(r *stage.Requirement) *stage.Stage {
	return stage.NewStage(r.Rectifier, 0, 0, 0, false, false, false, false)
}

func fieldPointer(at, field string) string {
	if field == "" {
		return at
	}
	return at + "/" + field
}
