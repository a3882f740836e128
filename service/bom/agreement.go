package bom

import (
	"cmp"
	"slices"

	"railproof/calc/rules"
	"railproof/service/substitution"
)

// Agreement is what one line, or a designator without one, comes to.
type Agreement uint8

const (
	Review            Agreement = iota // something could not be compared
	Agrees                             // everything compared agrees
	Differs                            // something differs
	Unreadable                         // the value's text cannot be read, or not in one way only
	Missing                            // the designator is not in the bill of material
	AlternateAccepted                  // an approved alternate, accepted as a substitution
	AlternateRejected                  // an approved alternate, rejected as one
)

// String returns the agreement as it stands on the wire.
func (a Agreement) String() string {
	return [...]string{"needs-review", "agrees", "differs", "unreadable", "missing", "alternate-accepted", "alternate-rejected"}[a]
}

// LineResult gathers the findings of one line in one role.
type LineResult struct {
	Row         int // 0 where a designator has no line
	Rail        string
	Role        string
	Designators []string
	Verdict     Agreement
	Findings    []Finding
	Alternate   *Alternate // the approved alternate that the line names
}

// ByLine gathers the findings of a report by line, in the order of the bill of
// material, designators without a line first.
func (r *Report) ByLine() []LineResult {
	type place struct {
		rail, role, first string
		row               int
	}
	var list []LineResult
	at := map[place]int{}
	for i := range r.Rails {
		rail := &r.Rails[i]
		for _, f := range rail.Findings {
			if f.Aspect == AspectAlternate || f.Row == 0 && f.Aspect != AspectPresent || len(f.Designators) == 0 {
				continue // about the role as a whole
			}
			p := place{f.Rail, f.Role, "", f.Row}
			if f.Row == 0 {
				p.first = f.Designators[0]
			}
			j, ok := at[p]
			if !ok {
				j = len(list)
				at[p] = j
				list = append(list, LineResult{Row: f.Row, Rail: f.Rail, Role: f.Role, Designators: f.Designators, Alternate: rail.alternateOf(f.Role, f.Row)})
			}
			list[j].Findings = append(list[j].Findings, f)
		}
	}
	for i := range list {
		list[i].settle()
	}
	slices.SortStableFunc(list, func(a, b LineResult) int { return cmp.Compare(a.Row, b.Row) })
	return list
}

// alternateOf returns the alternate that a line of a role names.
func (r *RailReport) alternateOf(role string, row int) *Alternate {
	for i := range r.Findings {
		f := &r.Findings[i]
		if f.Role != role || f.Row != row || f.Aspect != AspectPartNumber {
			continue
		}
		for j := range r.Alternates {
			if a := &r.Alternates[j]; a.Role == role && a.PartNumber == f.Found {
				return a
			}
		}
	}
	return nil
}

func (l *LineResult) settle() {
	gap := len(l.Findings) == 0
	differs, unreadable := false, false
	for i := range l.Findings {
		switch f := &l.Findings[i]; {
		case f.Aspect == AspectPresent && f.Row == 0 && f.Verdict == rules.Fail:
			l.Verdict = Missing
			return
		case f.Verdict == rules.Fail:
			differs = true
		case f.Verdict == rules.NotEvaluated:
			gap = true
			unreadable = unreadable || f.Aspect == AspectValue
		}
	}
	accepted := l.Alternate != nil && l.Alternate.Outcome.Verdict == substitution.Accepted
	switch {
	case l.Alternate != nil && l.Alternate.Outcome.Verdict == substitution.Rejected:
		l.Verdict = AlternateRejected
	case differs:
		l.Verdict = Differs
	case unreadable:
		l.Verdict = Unreadable
	case gap || l.Alternate != nil && !accepted:
		l.Verdict = Review
	case accepted:
		l.Verdict = AlternateAccepted
	default:
		l.Verdict = Agrees
	}
}
