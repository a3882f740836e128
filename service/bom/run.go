package bom

import (
	"context"
	"fmt"
	"slices"

	"railproof/calc/rules"
	"railproof/calc/spread"
	"railproof/calc/stage"
	"railproof/service/substitution"
)

// Binding ties a role of a rail to reference designators.
type Binding struct {
	Role        string
	Designators []string
	Alternates  []string // part numbers that were approved beside the proven one
}

// Rail is a proven stage and where its parts stand on the board.
type Rail struct {
	Name     string
	Stage    *stage.Stage
	Spreads  []spread.Variable
	Bindings []Binding
	Lineless []string // roles that no line stands for, such as a compensator inside the controller
	Ranges   []Range
}

// Unbound is a line that stands among a rail's designators but is bound to no
// role of any rail.
type Unbound struct {
	Rail        string
	Row         int
	Designators []string
	Value       string
	PartNumber  string
}

// Alternate is the outcome of one approved alternate, run as a substitution.
type Alternate struct {
	Role       string
	PartNumber string
	Outcome    substitution.Outcome
	Stage      *stage.Stage      // the stage with the alternate in it; nil if it could not be built
	Spreads    []spread.Variable // of that stage
}

// RailReport is what is known about one rail.
type RailReport struct {
	Name       string
	Verdict    rules.Overall
	Findings   []Finding
	Alternates []Alternate
	Unbound    []Unbound
}

// Report is the outcome of a check.
type Report struct {
	Verdict rules.Overall
	Lines   int // of the bill of material
	Bound   int // of them bound to a rail
	Rails   []RailReport
}

// Substitute assesses an approved alternate for a role of a rail, given by its
// position. It fills in outcome and stage.
type Substitute func(ctx context.Context, rail int, role, partNumber string) (Alternate, error)

// Check compares a bill of material with rails. substitute may be nil if no
// binding names alternates. The only errors are those of substitute.
func Check(ctx context.Context, lines []Line, rails []Rail, substitute Substitute) (Report, error) {
	index := newIndex(lines, rails)
	report := Report{Lines: len(lines), Verdict: rules.Passed}
	for i := range rails {
		r, err := index.rail(ctx, i, substitute)
		if err != nil {
			return Report{}, err
		}
		report.Rails = append(report.Rails, r)
		report.Verdict = worse(report.Verdict, r.Verdict)
	}
	if len(rails) == 0 {
		report.Verdict = rules.Incomplete
	}
	for _, used := range index.used {
		if used {
			report.Bound++
		}
	}
	return report, nil
}

// worse returns the verdict that decides: fail, then incomplete, then pass.
func worse(a, b rules.Overall) rules.Overall {
	if a == rules.Failed || b == rules.Failed {
		return rules.Failed
	}
	if a == rules.Incomplete || b == rules.Incomplete {
		return rules.Incomplete
	}
	return rules.Passed
}

// index finds lines by designator.
type index struct {
	lines  []Line
	rails  []Rail
	at     map[string][]int // designator -> lines that have it and are fitted
	absent map[string]bool  // designator -> only on a line that is not fitted
	bound  map[string]bool  // designators that some rail binds
	used   []bool           // lines that some rail binds
}

func newIndex(lines []Line, rails []Rail) *index {
	x := &index{lines: lines, rails: rails, at: make(map[string][]int, 2*len(lines)), absent: map[string]bool{}, bound: map[string]bool{}, used: make([]bool, len(lines))}
	for i := range lines {
		for _, d := range lines[i].Designators {
			if lines[i].NotFitted {
				x.absent[d] = true
			} else {
				x.at[d] = append(x.at[d], i)
			}
		}
	}
	for i := range rails {
		for _, b := range rails[i].Bindings {
			for _, d := range b.Designators {
				x.bound[d] = true
			}
		}
	}
	return x
}

func (x *index) rail(ctx context.Context, number int, substitute Substitute) (RailReport, error) {
	r := &x.rails[number]
	out := RailReport{Name: r.Name}
	for i := range r.Bindings {
		b := &r.Bindings[i]
		e, known := Expect(r.Stage, r.Spreads, b.Role)
		if !known {
			out.Findings = append(out.Findings, Finding{Rail: r.Name, Role: b.Role, Designators: b.Designators, Aspect: AspectPresent, Verdict: rules.NotEvaluated, Detail: "the proven stage has no such part, or no value for it"})
			continue
		}
		alternates, err := assess(ctx, number, b, substitute)
		if err != nil {
			return out, fmt.Errorf("bom: rail %s: %w", r.Name, err)
		}
		out.Alternates = append(out.Alternates, alternates...)
		out.Findings = append(out.Findings, x.binding(r, b, &e, alternates)...)
	}
	for _, role := range Roles(r.Stage, r.Spreads) {
		if !slices.Contains(r.Lineless, role) && !slices.ContainsFunc(r.Bindings, func(b Binding) bool { return b.Role == role }) {
			out.Findings = append(out.Findings, Finding{Rail: r.Name, Role: role, Aspect: AspectPresent, Detail: "no designator is bound to this part of the proof: nothing was compared with it"})
		}
	}
	out.Unbound = x.unbound(r)
	out.Verdict = overall(out.Findings)
	return out, nil
}

// assess runs the approved alternates of one binding.
func assess(ctx context.Context, rail int, b *Binding, substitute Substitute) ([]Alternate, error) {
	var list []Alternate
	for _, partNumber := range b.Alternates {
		if substitute == nil {
			return nil, fmt.Errorf("role %s has alternates, and nothing to assess them with", b.Role)
		}
		if err := ctx.Err(); err != nil {
			return nil, err
		}
		a, err := substitute(ctx, rail, b.Role, partNumber)
		if err != nil {
			return nil, fmt.Errorf("role %s, alternate %s: %w", b.Role, partNumber, err)
		}
		a.Role, a.PartNumber = b.Role, partNumber
		list = append(list, a)
	}
	return list, nil
}

// binding checks one role: its designators, its pieces, and each of its lines.
func (x *index) binding(r *Rail, b *Binding, e *Expectation, alternates []Alternate) []Finding {
	var found []Finding
	perLine := map[int][]string{}
	var order []int
	pieces := 0
	for _, d := range b.Designators {
		base := Finding{Rail: r.Name, Role: b.Role, Designators: []string{d}, Aspect: AspectPresent, Verdict: rules.Fail, Proven: e.Role}
		switch lines := x.at[d]; {
		case len(lines) == 0 && x.absent[d]:
			base.Detail = "stands on a line that is not fitted"
			found = append(found, base)
		case len(lines) == 0:
			base.Detail = "is not in the bill of material"
			found = append(found, base)
		case len(lines) > 1:
			base.Detail, base.Row = "stands on more than one line", x.lines[lines[1]].Row
			found = append(found, base)
		default:
			pieces++
			if perLine[lines[0]] == nil {
				order = append(order, lines[0])
			}
			perLine[lines[0]] = append(perLine[lines[0]], d)
			if x.absent[d] {
				base.Verdict, base.Row, base.Detail = rules.NotEvaluated, x.lines[lines[0]].Row, "stands on a line that is not fitted too: which holds?"
				found = append(found, base)
			}
		}
	}
	v, detail := rules.Pass, "as many pieces as were proven"
	if pieces != e.Count {
		v, detail = rules.Fail, "not the number of pieces that was proven"
	}
	found = append(found, Finding{Rail: r.Name, Role: b.Role, Designators: b.Designators, Aspect: AspectCount, Verdict: v, Proven: fmt.Sprint(e.Count), Found: fmt.Sprint(pieces), ProvenValue: float64(e.Count), FoundValue: float64(pieces), Unit: "1", Detail: detail})
	for _, i := range order {
		x.used[i] = true
		found = append(found, judge(r.Name, expected(e, alternates, x.lines[i].PartNumber), &x.lines[i], perLine[i])...)
	}
	for i := range alternates {
		found = append(found, alternates[i].finding(r.Name, b))
	}
	return found
}

// expected returns what a line must agree with: the proven part or, if the line
// names an approved alternate, that part as it was assessed.
func expected(e *Expectation, alternates []Alternate, partNumber string) *Expectation {
	for i := range alternates {
		a := &alternates[i]
		if a.PartNumber != partNumber || partNumber == e.PartNumber || a.Stage == nil {
			continue
		}
		if other, ok := Expect(a.Stage, a.Spreads, a.Role); ok {
			other.PartNumber, other.Count = partNumber, e.Count
			return &other
		}
	}
	return e
}

// finding tells what became of an approved alternate: one that purchasing may fit
// any day counts whether it is fitted now or not.
func (a *Alternate) finding(rail string, b *Binding) Finding {
	f := Finding{Rail: rail, Role: a.Role, Designators: b.Designators, Aspect: AspectAlternate, Found: a.PartNumber}
	switch a.Outcome.Verdict {
	case substitution.Accepted:
		f.Verdict, f.Detail = rules.Pass, "accepted as a substitution"
	case substitution.Rejected:
		f.Verdict, f.Detail = rules.Fail, "rejected as a substitution: "+firstReason(&a.Outcome)
	default:
		f.Detail = "needs review as a substitution: " + firstReason(&a.Outcome)
	}
	return f
}

func firstReason(o *substitution.Outcome) string {
	if len(o.Reasons) == 0 {
		return "no reason given"
	}
	return o.Reasons[0].Detail
}

func overall(findings []Finding) rules.Overall {
	verdict := rules.Incomplete
	for i := range findings {
		switch findings[i].Verdict {
		case rules.Fail:
			return rules.Failed
		case rules.Pass:
			if verdict == rules.Incomplete {
				verdict = rules.Passed
			}
		}
	}
	for i := range findings {
		if findings[i].Verdict == rules.NotEvaluated {
			return rules.Incomplete
		}
	}
	return verdict
}

// unbound lists the lines whose designators lie in the rail's ranges and are
// bound nowhere.
func (x *index) unbound(r *Rail) []Unbound {
	if len(r.Ranges) == 0 {
		return nil
	}
	var out []Unbound
	for i := range x.lines {
		l := &x.lines[i]
		var among []string
		for _, d := range l.Designators {
			if !x.bound[d] && slices.ContainsFunc(r.Ranges, func(g Range) bool { return g.covers(d) }) {
				among = append(among, d)
			}
		}
		if len(among) > 0 {
			out = append(out, Unbound{r.Name, l.Row, among, l.Value, l.PartNumber})
		}
	}
	return out
}
