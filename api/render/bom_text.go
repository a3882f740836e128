package render

import (
	"strconv"
	"strings"

	"railproof/api/wire"
)

// bomRows bounds the lines of a bill of material for reading; CSV and JSON have them
// all.
const bomRows = 200

// BomChecksText writes an answer of BOM checks for reading: rails, then every line
// that does not agree.
func BomChecksText(a *wire.BomChecksAnswer) string {
	p := new(page)
	p.line("bill of material: ", strings.ToUpper(a.Overall))
	p.b.WriteByte('\n')
	rows := make([][]string, 0, len(a.Rails))
	for i := range a.Rails {
		r := &a.Rails[i]
		rows = append(rows, []string{r.Name, r.Verdict, strconv.Itoa(r.Lines), strconv.Itoa(r.Differences), strconv.Itoa(r.NotEvaluated), strconv.Itoa(len(r.Missing)), strconv.Itoa(len(r.Unbound)), strconv.Itoa(len(r.Alternates))})
	}
	p.table([]align{left, left, right, right, right, right, right, right}, []string{"rail", "verdict", "lines", "differences", "not compared", "missing", "unbound", "alternates"}, rows)
	p.bomLines(a.Lines)
	for i := range a.Rails {
		p.bomRail(&a.Rails[i])
	}
	if len(a.Unbound) > 0 {
		p.title("lines in the rails' designator ranges that no role is bound to")
		for _, u := range a.Unbound[:min(len(a.Unbound), bomRows)] {
			p.wrapped("- line "+strconv.Itoa(u.Row)+", "+u.Rail+": "+strings.Join(u.Designators, " ")+" "+u.Value+" "+u.PartNumber, "  ")
		}
	}
	p.basis(&a.Basis)
	return p.b.String()
}

func (p *page) bomLines(list []wire.BomLineResult) {
	shown := 0
	for i := range list {
		l := &list[i]
		if l.Verdict == "agrees" || l.Verdict == "alternate-accepted" && len(l.Differences) == 0 {
			continue
		}
		if shown == 0 {
			p.title("lines that do not agree")
		}
		if shown++; shown > bomRows {
			continue
		}
		at := "no line"
		if l.Line != nil {
			at = "line " + strconv.Itoa(*l.Line)
		}
		p.wrapped("- "+at+", "+strings.Join(l.Designators, " ")+", "+l.Rail+" "+l.Role+": "+strings.ToUpper(l.Verdict)+differing(l.Differences), "  ")
	}
	if shown > bomRows {
		p.line(strconv.Itoa(shown-bomRows), " more in JSON and CSV")
	}
}

func differing(list []wire.BomDifference) string {
	s := ""
	for _, d := range list {
		s += "; " + d.Field + ": " + d.Detail
		if d.Proven != "" {
			s += ", proven " + d.Proven
		}
		if d.Found != "" {
			s += ", found " + d.Found
		}
	}
	return s
}

func (p *page) bomRail(r *wire.BomRailResult) {
	for _, role := range r.Roles {
		p.wrapped("- "+r.Name+" "+role.Role+": "+strings.TrimPrefix(differing(role.Differences), "; "), "  ")
	}
	for i := range r.Alternates {
		a := &r.Alternates[i]
		p.title(r.Name + ", alternate " + a.PartNumber)
		p.substitution(&a.Substitution)
	}
}
