package service

import (
	"context"

	"railproof/calc/caution"
	"railproof/calc/evaluate"
)

// LossesRequest asks for losses and temperatures at a list of points.
type LossesRequest struct {
	Design Design
	Places []Place
}

// LossesAnswer holds an outcome per point, in their order.
type LossesAnswer struct {
	Status   evaluate.Status // the worst of all
	Outcomes []*Outcome
	Basis    Basis
}

// Basis is what an answer rests on and what to mind about it.
type Basis struct {
	Assumptions []Assumption
	Cautions    []caution.Caution
	Warnings    []Warning
}

const (
	pointChunk       = 32 // [1] points between two looks at the context: well below 1 ms
	interactiveLimit = 64 // [1] points that still count as short work
)

// Losses evaluates a stage at each point.
func (s *Service) Losses(ctx context.Context, r *LossesRequest) (*LossesAnswer, error) {
	kind := interactive
	if len(r.Places) > interactiveLimit {
		kind = bulk
	}
	a := &LossesAnswer{Status: evaluate.OK, Outcomes: make([]*Outcome, len(r.Places))}
	err := s.run(ctx, kind, func() error {
		e := s.evaluator(r.Design.Stage)
		defer s.release(e)
		err := inChunks(ctx, s.turns(kind), len(r.Places), pointChunk, 1, func() *evaluate.Evaluator { return e }, func(*evaluate.Evaluator) {},
			func(e *evaluate.Evaluator, from, to int) {
				for i := from; i < to; i++ {
					a.Outcomes[i] = outcome(e, &r.Places[i].Point)
				}
			})
		if err != nil {
			return err
		}
		for _, o := range a.Outcomes {
			a.Status = worse(a.Status, o.Status)
			s.done.count(o.Status)
		}
		a.Basis = s.rests(&r.Design, e, r.Places, a.Outcomes, caution.Seen{})
		return nil
	})
	if err != nil {
		return nil, err
	}
	return a, nil
}

// rests gathers assumptions, cautions and warnings of outcomes. Effects of
// assumptions are computed at the first point that gave figures. seen is what is known
// of the stage besides.
func (s *Service) rests(d *Design, e *evaluate.Evaluator, places []Place, outcomes []*Outcome, seen caution.Seen) Basis {
	var base *basis
	var warn warnings
	warn.unused(d)
	for i, o := range outcomes {
		p := &places[i]
		seen.Add(p.At, d.Stage, &p.Point, &o.Result)
		warn.scale(d, &p.Point, &o.Result)
		warn.typicalControl(d, p.At, &p.Point.Control)
		warn.heldParts(p.At, &p.Point)
		if base == nil && o.Status.Figures() {
			base = &basis{&p.Point, &o.Result}
		}
	}
	return Basis{
		Assumptions: s.assumptions(d, e, base),
		Cautions:    caution.Of(d.Stage, d.At, d.Variables, &seen),
		Warnings:    warn.list,
	}
}
