package render

import (
	"fmt"
	"math"
	"strconv"
	"strings"

	"railproof/api/wire"
)

// CornersText writes an analysis of corners for reading.
func CornersText(a *wire.CornersAnswer) string {
	p := new(page)
	p.line(railName(a.Stage), ": worst case, ", a.Outcome)
	p.line("nominal at ", pointWords(a.NominalPoint), ": ", a.NominalStatus)
	sides := cornerSides(a)
	p.firstToFail(sides)
	p.title("figures")
	rows := make([][]string, len(sides))
	for i := range sides {
		rows[i] = sides[i].figures()
	}
	p.table([]align{left, right, left, right, right, right, right}, []string{"quantity", "limit", "verdict", "nominal", "worst found", "root-sum-sq", "quantile"}, rows)
	p.wrapped("Quantile: 99.865 % where a high value is bad, 0.135 % where a low one is, at the worst conditions. Root-sum-square in brackets: the response is too bent for it. A verdict with * rests on the models: the margin is smaller than their uncertainty.", "")
	p.title("where it is worst, and what makes it so")
	for i := range sides {
		p.cornerPlace(&sides[i])
	}
	p.cornerYield(a)
	p.cornerFailures(a.Failures)
	p.basis(&a.Basis)
	return p.b.String()
}

// firstToFail names the limit at the worst that has the least margin.
func (p *page) firstToFail(sides []cornerSide) {
	var first *cornerSide
	least := 0.0
	for i := range sides {
		s := &sides[i]
		if s.limit == nil || *s.limit == 0 || s.q.Limit.At == "nominal" || s.value() == nil {
			continue
		}
		margin := (*s.limit - *s.value()) / math.Abs(*s.limit)
		if s.name == "least" {
			margin = -margin
		}
		if first == nil || margin < least {
			first, least = s, margin
		}
	}
	if first == nil {
		return
	}
	words := "nearest to its limit: "
	if least < 0 {
		words = "furthest beyond its limit: "
	}
	p.wrapped(words+first.q.Quantity+", "+figure(first.value(), first.q.Unit)+" of "+first.bound()+", margin "+percent(least), "  ")
}

// cornerSide is one quantity on the side on which it is bad.
type cornerSide struct {
	q      *wire.QuantityCorners
	name   string
	worst  *wire.WorstPoint
	linear *wire.RootSumSquare
	at     *wire.Statistics // at the conditions of the worst point; nil: none
	limit  *float64
}

// cornerSides lists the sides that were sought, in the order of the answer.
func cornerSides(a *wire.CornersAnswer) []cornerSide {
	var list []cornerSide
	for i := range a.Quantities {
		q := &a.Quantities[i]
		for _, name := range []string{"least", "greatest"} {
			s := cornerSide{q: q, name: name, worst: q.Least}
			if q.Limit != nil {
				s.limit = q.Limit.Min
			}
			if name == "greatest" {
				s.worst = q.Greatest
				if q.Limit != nil {
					s.limit = q.Limit.Max
				}
			}
			if q.Limit != nil && s.limit == nil {
				continue
			}
			for k := range q.Linear {
				if q.Linear[k].Side == name {
					s.linear = &q.Linear[k]
				}
			}
			s.at = worstStatistics(q.Statistics, name)
			list = append(list, s)
		}
	}
	return list
}

// worstStatistics picks the condition corner with the worst outer quantile.
func worstStatistics(list []wire.Statistics, side string) *wire.Statistics {
	var worst *wire.Statistics
	for i := range list {
		if len(list[i].Quantiles) == 0 {
			continue
		}
		if worst == nil || side == "least" && outer(&list[i], side) < outer(worst, side) || side == "greatest" && outer(&list[i], side) > outer(worst, side) {
			worst = &list[i]
		}
	}
	return worst
}

// outer returns the quantile at minus or plus three sigma.
func outer(s *wire.Statistics, side string) float64 {
	probability := 0.00135
	if side == "greatest" {
		probability = 0.99865
	}
	for _, q := range s.Quantiles {
		if q.Probability == probability {
			return q.Value
		}
	}
	return s.Quantiles[0].Value
}

func (s *cornerSide) value() *float64 {
	if s.worst == nil {
		return nil
	}
	return s.worst.Value
}

func (s *cornerSide) linearValue() *float64 {
	switch {
	case s.linear == nil:
		return nil
	case s.name == "least":
		return &s.linear.Least
	}
	return &s.linear.Greatest
}

func (s *cornerSide) figures() []string {
	u := s.q.Unit
	rss := figure(s.linearValue(), u)
	if s.linear != nil && !s.linear.Trusted {
		rss = "(" + rss + ")"
	}
	quantile := "-"
	if s.at != nil {
		quantile = Figure3(outer(s.at, s.name), u)
	}
	verdict := s.q.Verdict
	if s.q.WithinBand != nil && *s.q.WithinBand {
		verdict += " *"
	}
	return []string{s.q.Quantity, s.bound(), verdict, figure(s.q.Nominal, u), figure(s.value(), u), rss, quantile}
}

// bound says the limit, or the side where there is none.
func (s *cornerSide) bound() string {
	if s.limit == nil {
		return s.name
	}
	sign := map[string]string{"least": "≥ ", "greatest": "≤ "}[s.name]
	if at := limitPlace(s.q.Limit); at != worstPlace {
		sign = at + " " + sign
	}
	return sign + Figure3(*s.limit, s.q.Unit)
}

// largest is the number of contributors that the table names.
const largest = 2

func (p *page) cornerPlace(s *cornerSide) {
	w := s.worst
	if w == nil {
		return
	}
	found := "found by " + w.FoundBy
	if w.Beyond {
		found = "inside the box, beyond every vertex"
	}
	if w.Status != "ok" {
		found += ", " + w.Status
	}
	age := ""
	if w.Point.Age != nil {
		age = ", age " + percent(*w.Point.Age)
	}
	p.wrapped("- "+s.q.Quantity+", "+s.name+": "+pointWords(w.Point)+age+" ("+found+"). Parts: "+makers(w.Contributions, false)+". Conditions: "+makers(w.Contributions, true)+".", "  ")
}

// makers says the largest contributions of parts or of conditions.
func makers(list []wire.Contribution, conditions bool) string {
	var words []string
	for i := range list {
		if strings.HasPrefix(list[i].Pointer, "/conditions/") == conditions && len(words) < largest {
			words = append(words, contributor(&list[i]))
		}
	}
	if words == nil {
		return "none"
	}
	return strings.Join(words, ", ")
}

func contributor(c *wire.Contribution) string {
	name := strings.TrimPrefix(strings.TrimPrefix(c.Pointer, "/stage/"), "/conditions/")
	if len(c.With) > 0 {
		name += fmt.Sprintf(" and %d more", len(c.With))
	}
	return name + " " + optional(c.Width, percent)
}

func (p *page) cornerYield(a *wire.CornersAnswer) {
	y := a.Yield
	if y == nil {
		return
	}
	p.title("drawn units")
	p.wrapped(strconv.Itoa(y.Passes)+" of "+strconv.Itoa(y.Samples)+" units pass everything at "+strconv.Itoa(len(a.ConditionCorners))+" condition corners: yield "+
		finePercent(y.Share)+", "+finePercent(y.Low)+" to "+finePercent(y.High)+" with "+percent(y.Confidence)+" confidence ("+y.Interval+")", "  ")
	p.line("sampling ", a.Sampling, ", seed ", strconv.Itoa(int(a.Seed)), ", ", strconv.Itoa(int(a.Evaluations)), " evaluations in all")
}

func (p *page) cornerFailures(list []wire.FailureCount) {
	if len(list) == 0 {
		return
	}
	p.title("evaluations that did not end well")
	for i := range list {
		f := &list[i]
		text := "- " + f.Status + ": " + strconv.Itoa(f.Count) + " of " + f.Method
		if f.Point != nil {
			text += ", such as at " + pointWords(f.Point)
		}
		p.wrapped(text, "  ")
	}
}

// finePercent writes a yield with the digits that it differs from all by.
func finePercent(ratio float64) string { return strconv.FormatFloat(100*ratio, 'g', 6, 64) + " %" }
