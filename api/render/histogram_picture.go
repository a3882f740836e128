package render

import (
	"math"
	"strconv"

	"railproof/api/wire"
)

// HistogramPicture draws the distribution of a quantity at the condition corner
// where it fails most, with limits and quantiles; nil without a histogram.
func HistogramPicture(a *wire.CornersAnswer, quantity string) *Picture {
	q := quantityOf(a, quantity)
	if q == nil {
		return nil
	}
	s := shownStatistics(q)
	if s == nil {
		return nil
	}
	name, unit, factor := quantityForPeople(q.Quantity)
	h := s.Histogram
	edges := make([]float64, len(h.Edges))
	for i, e := range h.Edges {
		edges[i] = factor * e
	}
	total := h.Below + h.Above
	for _, n := range h.Counts {
		total += n
	}
	shares := make([]float64, len(h.Counts))
	for i, n := range h.Counts {
		shares[i] = 100 * float64(n) / float64(max(total, 1))
	}
	p := &panel{x: ranged(name, unit, edges), y: ranged("share of units", "%", shares, []float64{0}).padded(0.14), tall: px(260), columns: &columns{edges, shares}}
	p.histogramMarks(q, s, factor)
	p.x = p.x.padded(0.03)
	return &Picture{
		title:       railName(a.Stage) + ": distribution of " + name,
		subtitle:    cornerPointWords(a, s.Corner) + "; " + countOf(s.Samples, "unit", "units"),
		description: "Histogram. Mean " + figureOf(s.Mean, unit, factor) + ", standard deviation " + figureOf(s.Deviation, unit, factor) + ". " + verdictWords(q),
		blocks:      alignPanels(p), note: outsideWords(h),
	}
}

func (p *panel) histogramMarks(q *wire.QuantityCorners, s *wire.Statistics, factor float64) {
	for _, v := range s.Quantiles {
		switch v.Probability {
		case 0.00135, 0.5, 0.99865:
			p.marks = append(p.marks, mark{x: factor * v.Value, y: math.NaN(), label: trimmed(strconv.FormatFloat(100*v.Probability, 'g', 5, 64)) + " %"})
		}
	}
	if q.Limit == nil {
		return
	}
	for _, l := range []*float64{q.Limit.Min, q.Limit.Max} {
		if l != nil {
			at := factor * *l
			p.marks = append(p.marks, mark{x: at, y: math.NaN(), label: "limit " + trimmed(Figure3(at, p.x.unit)), limit: true})
			p.x.least, p.x.greatest = min(p.x.least, at), max(p.x.greatest, at)
		}
	}
}

// shownStatistics returns the corner with a histogram where most units fail; of
// equal ones, where the values lie nearest to the limit.
func shownStatistics(q *wire.QuantityCorners) *wire.Statistics {
	var worst *wire.Statistics
	var most float64
	for i := range q.Statistics {
		s := &q.Statistics[i]
		if s.Histogram == nil || len(s.Histogram.Counts) == 0 {
			continue
		}
		weight := 0.0
		if s.Fails != nil {
			weight = 1e3 * float64(*s.Fails) / float64(max(s.Samples, 1))
		}
		if s.PercentileCpk != nil {
			weight -= *s.PercentileCpk / (1 + math.Abs(*s.PercentileCpk))
		}
		if worst == nil || weight > most {
			worst, most = s, weight
		}
	}
	return worst
}

func outsideWords(h *wire.Histogram) string {
	if h.Below+h.Above == 0 {
		return ""
	}
	return countOf(h.Below, "unit lies", "units lie") + " below the bins, " + strconv.Itoa(h.Above) + " above."
}

func figureOf(v *float64, unit string, factor float64) string {
	if v == nil {
		return "-"
	}
	return Figure3(factor**v, unit)
}

func cornerPointWords(a *wire.CornersAnswer, corner int) string {
	if corner >= len(a.ConditionCorners) {
		return ""
	}
	c := &a.ConditionCorners[corner]
	s := trimmed(Figure3(c.Input, "V")) + " in"
	if c.Load != nil {
		s += ", " + trimmed(Figure3(*c.Load, "A"))
	}
	if c.Resistance != nil {
		s += ", " + trimmed(Figure3(*c.Resistance, "Ohm"))
	}
	s += ", " + trimmed(Figure3(c.Ambient, "Cel")) + " ambient"
	if c.Age != nil {
		s += ", age " + trimmed(three(*c.Age))
	}
	return s
}
