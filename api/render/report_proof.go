package render

import (
	"cmp"
	"slices"
	"strconv"
	"strings"

	"railproof/api/wire"
)

// summary is what a reader must know who reads nothing else.
func (r *Report) summary() (list []fact) {
	if a := r.Rules; a != nil {
		c := judged(a.Overall)
		notes := failingNotes(a)
		list = append(list, fact{"Rules", a.Overall + ": " + countOf(a.Counts.Fail-notes, "finding fails", "findings fail") + ", " + countOf(notes, "note", "notes") + ", " + strconv.Itoa(a.Counts.NotEvaluated) + " not evaluated, " + strconv.Itoa(a.Counts.Waived) + " waived, " + strconv.Itoa(a.Counts.Pass) + " pass", c.Class})
	}
	if a := r.Corners; a != nil {
		c := judged(a.Outcome)
		list = append(list, fact{"Worst case", strings.TrimPrefix(cornersWords(a), "verdict: "), c.Class})
		if q := quantityOf(a, ""); q != nil && q.Margin != nil {
			name, _, _ := quantityForPeople(q.Quantity)
			list = append(list, fact{"Nearest worst-case limit", name + ": " + verdictWords(q), judged(q.Verdict).Class})
		}
	}
	if a := r.Losses; a != nil {
		it := &a.Items[hottestItem(a)]
		if it.Quantities != nil {
			list = append(list, fact{"Greatest loss", figure(it.Quantities.LossTotal, "W") + " at " + pointWords(it.Point) + ", efficiency " + optional(it.Quantities.Efficiency, percent), ""})
		}
	}
	for _, why := range r.Excluded {
		list = append(list, fact{"Not in this report", why, "mind"})
	}
	return list
}

// failingNotes counts the failing findings that decide nothing.
func failingNotes(a *wire.RuleChecksAnswer) (n int) {
	for i := range a.Findings {
		if f := &a.Findings[i]; f.Verdict == "fail" && f.Severity == "note" {
			n++
		}
	}
	return n
}

// Verdict is the worst that the proofs in the report say.
func (r *Report) Verdict() string {
	verdict := "ok"
	for _, v := range []string{r.cornersVerdict(), r.rulesVerdict()} {
		switch {
		case v == "fail":
			return v
		case v != "pass" && v != "ok":
			verdict = "not-evaluated"
		}
	}
	return verdict
}

func (r *Report) cornersVerdict() string {
	if r.Corners == nil {
		return "ok"
	}
	return r.Corners.Verdict()
}

func (r *Report) rulesVerdict() string {
	if r.Rules == nil {
		return "ok"
	}
	return r.Rules.Overall
}

// worstCase shows the extremes, their points and what contributes to them.
func (r *Report) worstCase() []part {
	a := r.Corners
	if a == nil {
		return nil
	}
	blocks := []part{{Text: cornersWords(a) + "."}}
	blocks = append(blocks, drawing(CornersPicture(a), "")...)
	t := &grille{Head: row("tnnnnnnt", "quantity", "nominal", "least found", "greatest found", "least allowed", "greatest allowed", "margin", "verdict")}
	for i := range a.Quantities {
		q := &a.Quantities[i]
		name, unit, factor := quantityForPeople(q.Quantity)
		low, high := "", ""
		if q.Limit != nil {
			low, high = figureOf(q.Limit.Min, unit, factor), figureOf(q.Limit.Max, unit, factor)
			if at := limitPlace(q.Limit); at != worstPlace {
				name += ", " + at
			}
		}
		cells := row("tnnnnnnt", name, figureOf(q.Nominal, unit, factor), found(q.Least, unit, factor), found(q.Greatest, unit, factor), low, high, optional(q.Margin, percent), "")
		cells[7] = judged(q.Verdict)
		t.Rows = append(t.Rows, cells)
	}
	blocks = append(blocks, part{Table: t}, part{Head: "Where the worst values lie"}, part{Table: worstPlaces(a)})
	for i := range a.Quantities {
		if q := &a.Quantities[i]; q.Limit != nil && len(q.OneAtATime) > 0 && tight(q) {
			blocks = append(blocks, drawing(Tornado(a, q.Quantity), "")...)
		}
	}
	if len(a.Failures) > 0 {
		f := &grille{Head: row("ttn", "ended as", "in", "evaluations")}
		for _, e := range a.Failures {
			f.Rows = append(f.Rows, []entry{judged(e.Status), {Text: e.Method}, {Text: strconv.Itoa(e.Count), Class: "n"}})
		}
		blocks = append(blocks, part{Head: "Evaluations that did not work"}, part{Table: f})
	}
	return blocks
}

// closeMargin is the margin below which a quantity's contributors are drawn.
const closeMargin = 0.15

func tight(q *wire.QuantityCorners) bool { return q.Margin == nil || *q.Margin < closeMargin }

func found(p *wire.WorstPoint, unit string, factor float64) string {
	if p == nil {
		return ""
	}
	return figureOf(p.Value, unit, factor)
}

// worstPlaces lists the points of the limited sides with their main contributors.
func worstPlaces(a *wire.CornersAnswer) *grille {
	t := &grille{Head: row("ttnttt", "quantity", "side", "value", "point", "found by", "main contributors")}
	for i := range a.Quantities {
		q := &a.Quantities[i]
		name, unit, factor := quantityForPeople(q.Quantity)
		for _, s := range []struct {
			side string
			at   *wire.WorstPoint
		}{{"least", q.Least}, {"greatest", q.Greatest}} {
			if s.at == nil || s.at.Point == nil {
				continue
			}
			by := s.at.FoundBy
			switch {
			case s.at.Proven:
				by += ", proven"
			case s.at.Beyond:
				by += ", inside the box"
			}
			t.Rows = append(t.Rows, row("ttnttw", name, s.side, figureOf(s.at.Value, unit, factor), pointWords(s.at.Point), by, contributors(s.at, unit, factor)))
		}
	}
	return t
}

const shownContributors = 4

func contributors(p *wire.WorstPoint, unit string, factor float64) string {
	list := slices.Clone(p.Contributions)
	size := func(c *wire.Contribution) float64 { return max(orZero(c.Change), -orZero(c.Change)) }
	slices.SortStableFunc(list, func(x, y wire.Contribution) int { return cmp.Compare(size(&y), size(&x)) })
	var parts []string
	for i := range list[:min(len(list), shownContributors)] {
		if c := &list[i]; c.Change != nil && *c.Change != 0 {
			parts = append(parts, variableName(&c.Named)+" "+difference(factor**c.Change, unit))
		}
	}
	return strings.Join(parts, "; ")
}

func orZero(v *float64) float64 {
	if v == nil {
		return 0
	}
	return *v
}

// findings lists what rules say, failures first.
func (r *Report) findings() []part {
	a := r.Rules
	if a == nil {
		return nil
	}
	order := map[string]int{"fail": 0, "not-evaluated": 1, "waived": 2, "pass": 3}
	list := slices.Clone(a.Findings)
	slices.SortStableFunc(list, func(x, y wire.Finding) int {
		return cmp.Or(cmp.Compare(order[x.Verdict], order[y.Verdict]), cmp.Compare(x.Severity, y.Severity))
	})
	t := &grille{Head: row("tttwnnnt", "verdict", "severity", "rule", "place", "value", "limit", "margin", "detail")}
	for i := range list {
		f := &list[i]
		detail := f.Detail
		if f.WithinBand != nil && *f.WithinBand {
			detail += " The margin is smaller than the model's band."
		}
		if missing := strings.Join(f.Missing, ", "); missing != "" && !strings.Contains(detail, missing) {
			detail += " Missing: " + missing + "."
		}
		cells := row("tttwnnnt", "", f.Severity, f.Title, strings.TrimPrefix(f.Pointer, "/stage/"), figure(f.Value, f.Unit), figure(f.Limit, f.Unit), optional(f.Margin, percent), detail)
		cells[0] = judged(f.Verdict)
		t.Rows = append(t.Rows, cells)
	}
	blocks := []part{{Text: packWords(a.Packs)}, {Table: t}}
	if w := waiverTable(list); len(w.Rows) > 0 {
		blocks = append(blocks, part{Head: "Waivers"}, part{Table: w})
	}
	return blocks
}

func packWords(packs []wire.PackUsed) string {
	list := make([]string, len(packs))
	for i, p := range packs {
		list[i] = nameOr(p.Title, p.ID) + " (" + p.ID
		if p.Edition != "" {
			list[i] += ", " + p.Edition
		}
		list[i] += ")"
	}
	return "Rule packs: " + strings.Join(list, "; ") + "."
}

func waiverTable(list []wire.Finding) *grille {
	t := &grille{Head: row("tttttt", "rule", "place", "reason", "approved by", "expires", "applied")}
	for i := range list {
		w := list[i].Waiver
		if w == nil {
			continue
		}
		applied := "no"
		if list[i].Verdict == "waived" {
			applied = "yes, was " + list[i].WaivedFrom
		}
		t.Rows = append(t.Rows, row("wwtttt", w.Rule, strings.TrimPrefix(list[i].Pointer, "/stage/"), w.Reason, w.Approver, w.Expires, applied))
	}
	return t
}
