package service

import (
	"context"
	"strconv"

	"railproof/calc/caution"
	"railproof/service/bom"
	"railproof/service/substitution"
)

// BomChecksRequest asks whether a bill of material agrees with what was proven.
type BomChecksRequest struct {
	Lines []bom.Line
	Rails []BomRail
}

// BomRail is a proven rail and where its parts stand on the board.
type BomRail struct {
	Name       string
	At         string // pointer of the rail: "/rails/0"
	Proof      Proof
	Bindings   []bom.Binding
	Lineless   []string // roles that no line stands for
	Ranges     []bom.Range
	Alternates []BomAlternate
}

// BomAlternate is a part that was approved for a role.
type BomAlternate struct {
	Role        string // "inductor"
	PartNumber  string
	Replacement Replacement
}

// BomChecksAnswer is the outcome of the comparison.
type BomChecksAnswer struct {
	Report   bom.Report
	Lines    []bom.LineResult
	Rails    []*SubstitutionsAnswer // of the alternates of each rail; nil where it has none
	Basis    Basis
	Complete bool
}

// BomChecks compares a bill of material with rails. Every approved alternate is
// assessed as a substitution, whether a line names it or not.
func (s *Service) BomChecks(ctx context.Context, r *BomChecksRequest) (*BomChecksAnswer, error) {
	a := &BomChecksAnswer{Rails: make([]*SubstitutionsAnswer, len(r.Rails)), Complete: true}
	err := s.run(ctx, bulk, func() error {
		rails := make([]bom.Rail, len(r.Rails))
		for i := range r.Rails {
			rail := &r.Rails[i]
			d := &rail.Proof.Design
			rails[i] = bom.Rail{Name: rail.Name, Stage: d.Stage, Spreads: d.Variables, Bindings: rail.Bindings, Lineless: rail.Lineless, Ranges: rail.Ranges}
			if err := s.alternates(ctx, rail, a, i); err != nil {
				return err
			}
			s.railRests(rail, a, i)
		}
		var err error
		a.Report, err = bom.Check(ctx, r.Lines, rails, func(_ context.Context, rail int, role, partNumber string) (bom.Alternate, error) {
			return r.Rails[rail].assessed(a.Rails[rail], role, partNumber), nil
		})
		a.Lines = a.Report.ByLine()
		return err
	})
	return a, err
}

// alternates assesses the alternates of a rail.
func (s *Service) alternates(ctx context.Context, rail *BomRail, a *BomChecksAnswer, i int) error {
	if len(rail.Alternates) == 0 {
		return nil
	}
	q := &SubstitutionsRequest{Proof: rail.Proof}
	for k := range rail.Alternates {
		q.Replacements = append(q.Replacements, rail.Alternates[k].Replacement)
	}
	var err error
	if a.Rails[i], err = s.substitute(ctx, q); err != nil {
		return err
	}
	a.Complete = a.Complete && a.Rails[i].Complete
	return nil
}

// assessed returns what became of an alternate.
func (r *BomRail) assessed(a *SubstitutionsAnswer, role, partNumber string) bom.Alternate {
	for k := range r.Alternates {
		if alternate := &r.Alternates[k]; alternate.Role == role && alternate.PartNumber == partNumber {
			d := &alternate.Replacement.Design
			return bom.Alternate{Outcome: a.Items[k].Outcome, Stage: d.Stage, Spreads: d.Variables}
		}
	}
	return bom.Alternate{Outcome: substitution.Outcome{Verdict: substitution.NeedsReview}}
}

// railRests adds what the comparison of one rail rests on: of a rail that was not
// evaluated, its cautions by what it was declared for.
func (s *Service) railRests(rail *BomRail, a *BomChecksAnswer, i int) {
	of := Basis{}
	if a.Rails[i] != nil {
		of = a.Rails[i].Basis
	} else {
		d := &rail.Proof.Design
		var seen caution.Seen
		seen.AddConditions(rail.Proof.At, d.Stage, &rail.Proof.Conditions)
		of.Cautions = caution.Of(d.Stage, d.At, d.Variables, &seen)
	}
	b := &a.Basis
	b.Assumptions = append(b.Assumptions, of.Assumptions...)
	b.Warnings = append(b.Warnings, of.Warnings...)
	for _, c := range of.Cautions {
		if c.Code == caution.EstimatesOnly && i > 0 {
			continue // once for the whole
		}
		if c.Pointer == "" && c.Code != caution.EstimatesOnly {
			c.Pointer = "/rails/" + strconv.Itoa(i)
		}
		b.Cautions = append(b.Cautions, c)
	}
	b.Assumptions, b.Cautions, b.Warnings = first(b.Assumptions), first(b.Cautions), first(b.Warnings)
}

// mostEntries bounds each list of a basis.
const mostEntries = 256 // [1]

func first[T any](list []T) []T { return list[:min(len(list), mostEntries)] }
