package rules

import (
	"fmt"
	"maps"
	"math"
	"slices"
	"strings"

	"railproof/calc/evaluate"
	"railproof/calc/parts"
	"railproof/calc/quantity"
)

// RuleOperatingStatus is this package's own rule: the stage must work at every
// point that the worst values were taken from.
const RuleOperatingStatus = "engine/operating-status"

// RuleConditions is this package's own rule: what the requirement asks for must have
// been looked at.
const RuleConditions = "engine/conditions"

// RuleCoverage is this package's own rule: a pack that tells parts in a role apart by
// their kind must have a rule for each kind that is there.
const RuleCoverage = "engine/pack-coverage"

// RulePlaceholder is this package's own rule: a proof is of parts that exist.
const RulePlaceholder = "engine/placeholder-part"

// Report is the outcome of a check.
type Report struct {
	Verdict       Overall
	Findings      []Finding
	Overrides     []Override // what derived packs changed
	NotApplicable []string   // rules that found no place to look at
}

// Check applies the packs' rules to a case. today is the date against which
// waivers expire.
//
// Any failure of an error or a warning fails the whole; otherwise any error not
// evaluated, or nothing evaluated at all, leaves it incomplete; otherwise it
// passes.
func Check(c *Case, packs []*Pack, waivers []Waiver, today Date) Report {
	p := prepare(c)
	r := Report{Findings: slices.Concat(p.statuses(), p.uncovered(), p.placeholders())}
	judged := map[string]bool{} // parts
	var bare []Finding
	for _, pack := range packs {
		r.Overrides = append(r.Overrides, pack.Overrides...)
		by := map[string]bool{}
		for i := range pack.Rules {
			rule := &pack.Rules[i]
			found := p.apply(pack, rule, by)
			if len(found) == 0 {
				r.NotApplicable = append(r.NotApplicable, rule.ID)
			}
			r.Findings = append(r.Findings, found...)
		}
		bare = append(bare, p.bare(pack, by)...)
		for part := range by {
			judged[part] = judged[part] || by[part]
		}
	}
	for i := range bare { // a part that some other pack has judged is no gap of the whole
		if judged[strings.TrimPrefix(bare[i].Pointer, p.c.StageAt+"/")] {
			bare[i].Severity = Warning
		}
	}
	r.Findings = append(r.Findings, bare...)
	r.Findings = waive(r.Findings, waivers, today)
	r.Verdict = verdict(r.Findings)
	return r
}

func verdict(findings []Finding) Overall {
	failed, gap, evaluated := false, false, false
	for i := range findings {
		f := &findings[i]
		switch f.Verdict {
		case Fail:
			failed = failed || f.Severity != Note
		case NotEvaluated:
			gap = gap || f.Severity == Error
		case Pass, Waived:
			evaluated = true
		}
	}
	switch {
	case failed:
		return Failed
	case gap || !evaluated:
		return Incomplete
	}
	return Passed
}

// statuses returns the findings about points at which the stage does not work.
func (p *prepared) statuses() []Finding {
	var out []Finding
	seen := map[evaluate.Status]bool{}
	for _, s := range p.c.Statuses {
		if s.Status.OK() || seen[s.Status] {
			continue
		}
		seen[s.Status] = true
		f := blank()
		f.Rule, f.Title, f.Pointer = RuleOperatingStatus, "The stage works at every corner", p.c.StageAt
		f.Corners = []int{s.Corner}
		f.Basis = "this service's own rule: a point that cannot be evaluated is no pass"
		f.Detail = fmt.Sprintf("The stage is not in regular operation at a corner: %s.", s.Status)
		switch s.Status {
		case evaluate.NotRun, evaluate.NotConverged:
			f.Missing = []string{"an answer at this corner"}
		default:
			f.Verdict = Fail
		}
		out = append(out, f)
	}
	return out
}

// uncovered returns the findings about what the requirement asks for beyond the case.
func (p *prepared) uncovered() []Finding {
	var out []Finding
	for _, g := range p.c.Uncovered {
		f := blank()
		f.Rule, f.Title, f.Pointer = RuleConditions, "What the requirement asks for was looked at", g.Pointer
		f.Basis = "this service's own rule: what was not looked at is no pass"
		f.Missing = []string{g.Pointer}
		f.Detail = "Not evaluated; " + strings.ToLower(g.Detail[:1]) + g.Detail[1:]
		out = append(out, f)
	}
	return out
}

// placeholders returns a finding for every part that only stands for one yet to be
// chosen.
func (p *prepared) placeholders() []Finding {
	var out []Finding
	for scope := range ScopeCount {
		for place := range scope.places(p.c.Stage) {
			part := scope.part(place)
			if !p.at(scope, place, nil).flags[rootPart+"assumed"] {
				continue
			}
			f := blank()
			f.Rule, f.Title, f.Pointer = RulePlaceholder, "The part is a real one", join(p.c.StageAt, part)
			f.Basis = "this service's own rule: figures of a part that nobody has chosen prove nothing"
			f.Missing = []string{"the data of a real part"}
			f.Detail = "Not evaluated; " + part + " is a placeholder: its figures and ratings are what a part would need."
			out = append(out, f)
		}
	}
	return out
}

// bare returns a finding for every part whose kind no rule of a pack covers although
// the pack has rules for other kinds in its role; by tells of each part whether a rule
// applies.
func (p *prepared) bare(pack *Pack, by map[string]bool) []Finding {
	var out []Finding
	for _, part := range slices.Sorted(maps.Keys(by)) {
		if by[part] {
			continue
		}
		f := blank()
		f.Rule, f.Title, f.Pointer = RuleCoverage, "The pack covers the kind of part", join(p.c.StageAt, part)
		f.Pack, f.Edition, f.Provenance = pack.ID, pack.Edition, pack.Provenance
		f.Basis = "this service's own rule: a part that no rule judges is no pass"
		f.Missing = []string{"a rule of " + pack.ID + " for parts of this kind"}
		f.Detail = "Not evaluated; no rule of " + pack.ID + " is for the kind of " + part + "."
		out = append(out, f)
	}
	return out
}

// apply returns one finding for every place that a rule covers, and notes in by
// whether it applied to the parts that it tells apart by kind.
func (p *prepared) apply(pack *Pack, rule *Rule, by map[string]bool) []Finding {
	var out []Finding
	for i := range rule.Bodies {
		body := &rule.Bodies[i]
		for place := range body.Scope.places(p.c.Stage) {
			f, applies := p.judge(pack, rule, body, place)
			if applies {
				out = append(out, f)
			}
			if part := body.Scope.part(place); body.ByKind || applies {
				by[part] = by[part] || applies
			}
		}
	}
	return out
}

func (p *prepared) judge(pack *Pack, rule *Rule, body *Body, place int) (Finding, bool) {
	facts := p.at(body.Scope, place, pack.Parameters)
	part := body.Scope.part(place)
	f := blank()
	f.Rule, f.Title, f.Severity, f.Relation, f.Unit = rule.ID, rule.Title, rule.Severity, rule.Relation, rule.Unit
	f.Basis, f.Pack, f.Edition, f.Provenance, f.Origin = rule.Basis, pack.ID, pack.Edition, pack.Provenance, rule.Origin
	f.ByKind = body.ByKind
	if f.Pointer = rule.Pointer; f.Pointer == "" {
		f.Pointer = join(p.c.StageAt, part, rule.At)
	}

	gate := &Look{facts: facts}
	if body.When != nil {
		applies := body.When(gate)
		if len(gate.missing) > 0 || gate.problem != "" {
			return p.unevaluated(f, gate, part), true
		}
		if !applies {
			return f, false
		}
	}
	look := &Look{facts: facts, beyond: gate.beyond}
	for _, need := range rule.Needs {
		if !look.Has(need) {
			look.missing = append(look.missing, need)
		}
	}
	f.Value = body.Value(look)
	f.Corners, f.WorstBy = slices.Clone(look.corners), look.by
	f.Limit = body.Limit(look)
	if len(look.missing) > 0 || look.problem != "" || !finite(f.Value) || !finite(f.Limit) {
		f.Value, f.Limit = known(f.Value), known(f.Limit)
		return p.unevaluated(f, look, part), true
	}
	f.Margin = margin(rule.Relation, f.Value, f.Limit, rule.Unit)
	pass := meets(rule.Relation, f.Value, f.Limit)
	if look.banded {
		p.band(&f, body, facts, pass)
	}
	if len(look.beyond) > 0 {
		return p.unevaluated(f, look, part), true
	}
	if pass {
		if rests := restsOn(rule.Relation, body, look); len(rests) > 0 {
			f.Verdict, f.Missing = NotEvaluated, rests
			f.Detail = "Not evaluated; it passes with what is assumed for " + strings.Join(rests, ", ") + ", but not over the whole range in which that may lie."
			return f, true
		}
	}
	f.Verdict = Fail
	if pass {
		f.Verdict = Pass
	}
	if part == "" {
		part = "stage"
	}
	f.Detail = rule.Message.fill(&f, part)
	if f.WithinBand {
		f.Detail += fmt.Sprintf(" The loss models leave it between %s and %s, on both sides of the limit.", quantity.Written(f.ValueLow, f.Unit), quantity.Written(f.ValueHigh, f.Unit))
	}
	return f, true
}

// finite reports whether a figure can be compared: what a division by zero yields
// lies on the good side of every limit, or of none.
func finite(x float64) bool { return !math.IsNaN(x) && !math.IsInf(x, 0) }

// known returns a figure, or that it is unknown where it is none.
func known(x float64) float64 {
	if !finite(x) {
		return parts.Unknown
	}
	return x
}

// restsOn lists the numbers that nobody gave at one end of whose range a rule that
// passes would not.
func restsOn(r Relation, body *Body, look *Look) []string {
	var list []string
	slices.Sort(look.under)
	for _, at := range look.under {
		for end := range 2 {
			l := &Look{facts: look.facts, assume: at, end: end}
			value, limit := body.Value(l), body.Limit(l)
			if !(finite(value) && finite(limit) && meets(r, value, limit)) {
				list = append(list, at)
				break
			}
		}
	}
	return list
}

// band computes the value at both ends of the model bands.
func (p *prepared) band(f *Finding, body *Body, facts *facts, pass bool) {
	low := &Look{facts: facts, side: sideLow}
	high := &Look{facts: facts, side: sideHigh}
	a, b := body.Value(low), body.Value(high)
	la, lb := body.Limit(low), body.Limit(high)
	f.ValueLow, f.ValueHigh = math.Min(a, b), math.Max(a, b)
	f.WithinBand = meets(f.Relation, a, la) != pass || meets(f.Relation, b, lb) != pass
}

// unevaluated says why a rule could not be decided.
func (p *prepared) unevaluated(f Finding, l *Look, part string) Finding {
	f.Verdict = NotEvaluated
	f.Beyond = l.beyond
	for _, name := range l.missing {
		for _, at := range p.lacking(name, part) {
			if !slices.Contains(f.Missing, at) {
				f.Missing = append(f.Missing, at)
			}
		}
	}
	var why []string
	if len(f.Missing) > 0 {
		why = append(why, "missing: "+strings.Join(f.Missing, ", "))
	}
	if len(l.beyond) > 0 {
		why = append(why, "rests on a table beyond its ends: "+strings.Join(l.beyond, ", "))
	}
	if l.problem != "" {
		why = append(why, l.problem)
	}
	if len(why) == 0 {
		why = append(why, "the value or its limit is not a number")
	}
	f.Detail = "Not evaluated; " + strings.Join(why, "; ") + "."
	return f
}

// lacking returns what a missing fact needs: what the case knows that its
// computation lacks, else the fact itself.
func (p *prepared) lacking(name, part string) []string {
	_, key, _ := strings.Cut(name, ".")
	id, ok := quantity.ByKey(key)
	if _, bank, inBank := strings.Cut(part, "/"); !ok && inBank {
		id, ok = quantity.ByKey(key + "/" + bank)
	}
	if ok && len(p.c.Absent[id]) > 0 {
		return p.c.Absent[id]
	}
	return []string{p.place(name, part)}
}

// place returns where a missing fact would be given: the pointer of a field, or
// the name of a quantity.
func (p *prepared) place(name, part string) string {
	root, rest, _ := strings.Cut(name, ".")
	path := strings.ReplaceAll(rest, ".", "/")
	if rest == biasEnd {
		path = biasTable
	}
	switch root + "." {
	case rootPart, rootPartLeast, rootPartGreatest:
		return join(p.c.StageAt, part, path)
	case rootStage, rootStageLeast, rootStageGreatest:
		return join(p.c.StageAt, path)
	case rootRequirement:
		return join(p.c.RequirementAt, path)
	case rootParameter:
		return name
	}
	return rest
}

// join builds a pointer of a prefix and tails, any of which may be empty.
func join(at string, tails ...string) string {
	for _, t := range tails {
		if t != "" {
			at += "/" + t
		}
	}
	return at
}
