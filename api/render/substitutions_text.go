package render

import (
	"cmp"
	"math"
	"slices"
	"strconv"
	"strings"

	"railproof/api/wire"
)

// SubstitutionsText writes an answer of substitutions for reading.
func SubstitutionsText(a *wire.SubstitutionsAnswer) string {
	p := new(page)
	p.line("substitutions: ", strings.ToUpper(a.Overall), "; the stage as it is: ", a.Before, "; ", packNames(a.Packs))
	items := make([]*wire.SubstitutionItem, len(a.Items))
	for i := range a.Items {
		items[i] = &a.Items[i]
	}
	slices.SortStableFunc(items, func(x, y *wire.SubstitutionItem) int { return cmp.Compare(x.Rank, y.Rank) })
	p.b.WriteByte('\n')
	rows := make([][]string, 0, len(items))
	for _, i := range items {
		t := i.Terms
		rows = append(rows, []string{strconv.Itoa(i.Rank), itemName(i), i.Role, i.Verdict, optional(i.Score, three), optional(t.Loss, three), optional(t.Temperature, percent), optional(t.Cost, three), optional(t.Area, three), strconv.Itoa(len(i.Missing))})
	}
	p.table([]align{right, left, left, left, right, right, right, right, right, right}, []string{"rank", "part", "role", "verdict", "score", "loss", "heat used", "cost", "area", "missing"}, rows)
	for _, i := range items {
		p.substitution(i)
	}
	p.basis(&a.Basis)
	return p.b.String()
}

func itemName(i *wire.SubstitutionItem) string { return cmp.Or(i.ID, "-") }

// substitution writes one replacement in full.
func (p *page) substitution(i *wire.SubstitutionItem) {
	p.title(itemName(i) + " as " + i.Role + ": " + strings.ToUpper(i.Verdict))
	for _, r := range i.Reasons {
		rule := ""
		if r.Rule != "" {
			rule = r.Rule + ": "
		}
		p.wrapped("- "+r.Code+": "+rule+r.Detail+place(r.Pointer), "  ")
	}
	var rows [][]string
	for k := range i.Quantities {
		if row := changeRow(&i.Quantities[k]); row != nil {
			rows = append(rows, row)
		}
	}
	if len(rows) > 0 {
		p.table([]align{left, right, right, left, right, right, right}, []string{"quantity", "nominal", "with part", "", "worst", "with part", "limit"}, rows)
	}
	better, worse := 0, 0
	for _, f := range i.Findings {
		switch f.Change {
		case "better", "disappears":
			better++
		default:
			worse++
		}
	}
	p.line(strconv.Itoa(better), " findings better or gone, ", strconv.Itoa(worse), " worse or new")
	for k := range i.Cautions {
		c := &i.Cautions[k]
		p.wrapped("- caution: "+c.Detail+figures(c)+place(c.Pointer), "  ")
	}
}

// leastMove is the relative change from which a quantity is worth a line for reading.
const leastMove = 0.005 // [1]

// changeRow writes a quantity on the side that matters: that of its limit, else the
// greatest.
func changeRow(q *wire.QuantityChange) []string {
	side, before, after, limit := "greatest", q.GreatestBefore, q.GreatestAfter, ""
	if l := q.Limit; l != nil && l.Max != nil {
		limit = "<= " + Figure3(*l.Max, q.Unit)
	}
	if l := q.Limit; before == nil && after == nil || l != nil && l.Min != nil && l.Max == nil {
		side, before, after = "least", q.LeastBefore, q.LeastAfter
		if l != nil && l.Min != nil {
			limit = ">= " + Figure3(*l.Min, q.Unit)
		}
	}
	if before == nil && after == nil {
		side = ""
	}
	if !moves(q.NominalBefore, q.NominalAfter) && !moves(before, after) {
		return nil
	}
	return []string{q.Quantity, figure(q.NominalBefore, q.Unit), figure(q.NominalAfter, q.Unit), side, figure(before, q.Unit), figure(after, q.Unit), limit}
}

func moves(before, after *float64) bool {
	if before == nil || after == nil {
		return before != after
	}
	return math.Abs(*after-*before) > leastMove*math.Abs(*before)
}
