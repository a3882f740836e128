package service

import (
	"context"
	"slices"
	"strings"

	"railproof/calc/caution"
	"railproof/calc/evaluate"
	"railproof/calc/rules"
	"railproof/service/substitution"
)

// Replacement is a part for a role, put into the proven stage.
type Replacement struct {
	ID       string
	Role     string   // pointer of the part that is replaced: "/stage/inductor"
	At       string   // pointer of the part in the request: "/replacements/0/inductor"
	Design   Design   // the stage that has the part
	StandIns []string // pointers of what the part's data leave out and the present part's stood in for
	Cost     float64  // NaN: not given
	Area     float64  // [m2] NaN: not given
}

// SubstitutionsRequest asks which parts may replace those of a proven stage.
type SubstitutionsRequest struct {
	Proof        Proof
	Replacements []Replacement
	Weights      substitution.Weights
}

// SubstitutionsAnswer holds an outcome per replacement, in their order.
type SubstitutionsAnswer struct {
	Before   rules.Report
	Items    []SubstitutionItem
	Corners  []WorstCorner // that findings of the stage as it is refer to
	Basis    Basis
	Complete bool // everything was evaluated
}

// SubstitutionItem is what is known of one replacement.
type SubstitutionItem struct {
	substitution.Outcome
	Status  evaluate.Status // the gravest met with the part
	Report  rules.Report
	Corners []WorstCorner // that findings with the part refer to
	Limits  []rules.Limit
}

// Substitutions assesses each replacement alone against the proven stage.
func (s *Service) Substitutions(ctx context.Context, r *SubstitutionsRequest) (*SubstitutionsAnswer, error) {
	var a *SubstitutionsAnswer
	err := s.run(ctx, bulk, func() error {
		var err error
		a, err = s.substitute(ctx, r)
		return err
	})
	return a, err
}

func (s *Service) substitute(ctx context.Context, r *SubstitutionsRequest) (*SubstitutionsAnswer, error) {
	p := &r.Proof
	p.requireAlike = substitution.LimitsOf(&p.Requirement)
	p.prepare()
	meter := MeterOf(ctx)
	meter.Expect(1 + len(r.Replacements))
	before, err := s.worst(ctx, p.request(&p.Design), s.workers)
	if err != nil {
		return nil, err
	}
	meter.Add(1)
	proven := assess(p, before)
	after := make([]*worstCase, len(r.Replacements))
	candidates := make([]substitution.Candidate, len(r.Replacements))
	failed := make([]error, len(r.Replacements))
	// the search of each takes its own turns
	err = inChunks(ctx, nil, len(after), 1, s.workers, noWorkspace, keepNothing, func(_ struct{}, i, _ int) {
		c := &r.Replacements[i]
		q := p.request(&c.Design)
		q.like, q.role = before, c.Role
		judge := func() {
			if after[i], failed[i] = s.worst(ctx, q, 1); failed[i] == nil {
				candidates[i] = substitution.Candidate{ID: c.ID, Role: c.Role, Cost: c.Cost, Area: c.Area, After: assess(p, after[i])}
				candidates[i].After.Assumed = c.gaps(candidates[i].After.Assumed)
			}
		}
		if judge(); failed[i] == nil && len(after) <= mostSearchedFully && substitution.NeedsSearch(proven, candidates[i].After) {
			q.like = nil
			judge()
		}
		meter.Add(1)
	})
	for _, e := range failed {
		if err == nil {
			err = e
		}
	}
	if err != nil {
		return nil, err
	}
	limits := append(append([]rules.Limit(nil), p.requireAlike...), p.Limits...)
	a := &SubstitutionsAnswer{Before: proven.Report, Corners: before.Corners, Basis: s.proofRests(p, before), Complete: before.complete()}
	for i, o := range substitution.Rank(proven, candidates, limits, r.Weights) {
		a.Items = append(a.Items, SubstitutionItem{o, after[i].worstStatus(), candidates[i].After.Report, after[i].Corners, limits})
		a.Complete = a.Complete && after[i].complete()
	}
	return a, nil
}

// mostSearchedFully is the number of replacements up to which those near a limit get
// the search of a check; among more, they are left to review.
const mostSearchedFully = 10 // [1]

// assess judges a worst case by the proof's rules.
func assess(p *Proof, w *worstCase) *substitution.Assessment {
	a := &substitution.Assessment{
		Nominal: *w.Case.Nominal, Extremes: w.Extremes, Report: rules.Check(&w.Case, p.packs, p.Waivers, p.Date),
		Cautions: caution.Of(w.Stage, w.StageAt, w.Spreads, &w.seen),
	}
	for i := range w.Assumed {
		a.Assumed = append(a.Assumed, w.StageAt+"/"+w.Assumed[i].Field)
	}
	return a
}

// complete reports whether every evaluation had an answer.
func (w *worstCase) complete() bool { return w.worstStatus() != evaluate.NotConverged }

// gaps lists what the part's data leave out: the defaults that were used, and what the
// present part stood in for.
func (r *Replacement) gaps(assumed []string) []string {
	list := append([]string(nil), r.StandIns...)
	for _, at := range assumed {
		if !slices.ContainsFunc(r.StandIns, func(s string) bool { return at == s || strings.HasPrefix(at, s+"/") }) {
			list = append(list, at)
		}
	}
	return list
}
