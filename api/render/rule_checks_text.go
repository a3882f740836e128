package render

import (
	"cmp"
	"math"
	"slices"
	"strconv"
	"strings"

	"railproof/api/wire"
)

// RuleChecksText writes an answer of rule checks for reading: what fails and what
// was not evaluated first and in full, then the rest in a table.
func RuleChecksText(a *wire.RuleChecksAnswer) string {
	p := new(page)
	p.line(railName(a.Stage), ": rule check, ", strings.ToUpper(a.Overall))
	n := &a.Counts
	p.line(strconv.Itoa(n.Pass), " pass, ", strconv.Itoa(n.Fail), " fail, ", strconv.Itoa(n.Waived), " waived, ", strconv.Itoa(n.NotEvaluated), " not evaluated; ", packNames(a.Packs))
	deciding := func(f *wire.Finding) bool { return f.Severity != "note" }
	p.grave("fails", a.Findings, "fail", deciding)
	p.grave("not evaluated", a.Findings, "not-evaluated", deciding)
	p.grave("waived", a.Findings, "waived", deciding)
	for _, verdict := range []string{"fail", "not-evaluated", "waived"} {
		p.grave("notes, which decide nothing: "+verdict, a.Findings, verdict, func(f *wire.Finding) bool { return !deciding(f) })
	}
	p.passed(a.Findings)
	p.overrides(a.Overrides)
	p.basis(&a.Basis)
	return p.b.String()
}

func packNames(list []wire.PackUsed) string {
	names := make([]string, len(list))
	for i := range list {
		names[i] = list[i].ID + " (" + list[i].Edition + ")"
	}
	return strings.Join(names, ", ")
}

// grave writes the wanted findings of one verdict in full.
func (p *page) grave(title string, list []wire.Finding, verdict string, wanted func(*wire.Finding) bool) {
	first := true
	for i := range list {
		f := &list[i]
		if f.Verdict != verdict || !wanted(f) {
			continue
		}
		if first {
			p.title(title)
			first = false
		}
		p.wrapped("- "+f.Severity+", "+f.Rule+": "+findingWords(f), "  ")
	}
}

// findingWords says a finding in figures, and where it is worst.
func findingWords(f *wire.Finding) string {
	s := f.Detail
	if f.Value != nil && f.Limit != nil {
		s = f.Title + ": " + Figure3(*f.Value, f.Unit) + ", " + strings.ReplaceAll(f.Relation, "-", " ") + " " + Figure3(*f.Limit, f.Unit)
		if f.Verdict == "not-evaluated" {
			s += "; " + f.Detail
		}
	}
	if len(f.Corners) > 0 {
		s += "; worst at " + cornerWords(&f.Corners[0])
	}
	if f.WithinBand != nil && f.ValueLow != nil && f.ValueHigh != nil {
		s += "; the loss models leave it between " + Figure3(*f.ValueLow, f.Unit) + " and " + Figure3(*f.ValueHigh, f.Unit)
	}
	if w := f.Waiver; w != nil {
		s += "; waived by " + w.Approver + " until " + w.Expires + ": " + w.Reason
	}
	return s + place(f.Pointer)
}

// passed writes what passes, the least margin first.
func (p *page) passed(list []wire.Finding) {
	var passes []*wire.Finding
	for i := range list {
		if list[i].Verdict == "pass" {
			passes = append(passes, &list[i])
		}
	}
	if len(passes) == 0 {
		return
	}
	p.title("passes, the least margin first")
	margin := func(f *wire.Finding) float64 {
		if f.Margin == nil {
			return math.Inf(1)
		}
		return *f.Margin
	}
	slices.SortStableFunc(passes, func(x, y *wire.Finding) int { return cmp.Compare(margin(x), margin(y)) })
	var rows [][]string
	for _, f := range passes {
		at := ""
		if len(f.Corners) > 0 {
			at = cornerShort(&f.Corners[0])
		}
		left := optional(f.Margin, shortPercent)
		if f.WithinBand != nil {
			left += "*"
		} else {
			left += " "
		}
		rows = append(rows, []string{bareRule(f.Rule), partOf(f.Pointer), figure(f.Value, f.Unit), figure(f.Limit, f.Unit), left, at})
	}
	p.table([]align{left, left, right, right, right, left}, []string{"rule", "part", "worst", "limit", "margin", "at"}, rows)
	for _, f := range passes {
		if f.WithinBand != nil {
			p.line("* the margin is smaller than what the loss models leave open")
			break
		}
	}
	if vertices := searchedAtVertices(passes); vertices != "" {
		p.wrapped("The worst values of "+vertices+" are the worst at vertices of tolerances and conditions, not searched for inside.", "")
	}
}

// searchedAtVertices names the rules whose worst values were looked for at vertices
// only.
func searchedAtVertices(list []*wire.Finding) string {
	var names []string
	for _, f := range list {
		if name := bareRule(f.Rule); strings.HasSuffix(f.WorstBy, "vertices") && !slices.Contains(names, name) {
			names = append(names, name)
		}
	}
	return strings.Join(names, ", ")
}

func shortPercent(ratio float64) string {
	digits := 0
	if math.Abs(ratio) < 0.0995 {
		digits = 1
	}
	return strconv.FormatFloat(100*ratio, 'f', digits, 64) + " %"
}

// cornerShort says a corner in as few columns as it can: 32 V 0.1 A -20 °C.
func cornerShort(c *wire.Corner) string {
	s := ""
	for _, part := range []struct {
		v    *float64
		unit string
	}{{c.Input, " V"}, {c.Load, " A"}, {c.Resistance, " Ω"}, {c.Ambient, " °C"}} {
		if part.v != nil {
			s += " " + strconv.FormatFloat(*part.v, 'g', 3, 64) + part.unit
		}
	}
	return strings.TrimPrefix(s, " ")
}

func bareRule(id string) string { return id[strings.IndexByte(id, '/')+1:] }

// partOf names the part that a pointer of a finding is about.
func partOf(pointer string) string {
	_, below, found := strings.Cut(pointer, "/stage/")
	if !found {
		return strings.TrimPrefix(pointer, "/")
	}
	tokens := strings.SplitN(below, "/", 3)
	if len(tokens) > 1 && strings.HasSuffix(tokens[0], "_capacitors") {
		return tokens[0] + "/" + tokens[1]
	}
	return tokens[0]
}

func (p *page) overrides(list []wire.OverrideUsed) {
	if len(list) == 0 {
		return
	}
	p.title("overrides")
	for _, o := range list {
		p.wrapped("- "+o.Pack+" changes "+o.Target+", "+o.What+": "+o.From+" to "+o.To+"; "+o.Reason, "  ")
	}
}
