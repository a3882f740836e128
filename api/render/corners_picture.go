package render

import (
	"cmp"
	"math"
	"slices"
	"strconv"
	"strings"

	"railproof/api/wire"
)

// CornersPicture draws a strip for each quantity: nominal value, root-sum-square,
// worst points found, distribution and limits on one scale.
func CornersPicture(a *wire.CornersAnswer) *Picture {
	list := &strips{}
	var said []string
	for i := range a.Quantities {
		if s, ok := stripOf(&a.Quantities[i]); ok {
			list.rows = append(list.rows, s)
			said = append(said, s.scale.name+": "+s.verdict)
		}
	}
	if len(list.rows) == 0 {
		return nil
	}
	p := &Picture{
		title:       railName(a.Stage) + ": worst case of each quantity",
		subtitle:    cornersWords(a),
		description: "A strip per quantity. " + strings.Join(said, "; "),
		blocks:      []block{list},
	}
	return p
}

// cornersWords says what was done and found, in a line.
func cornersWords(a *wire.CornersAnswer) string {
	s := "verdict: " + a.Outcome + "; " + countOf(len(a.Variables), "variable", "variables")
	if a.SamplesRun != nil {
		s += ", " + countOf(int(*a.SamplesRun), "sample", "samples") + " (" + a.Sampling + ")"
	}
	if y := a.Yield; y != nil {
		s += "; yield " + share(y.Share, 1) + ", " + percent(y.Confidence) + " sure of " + yieldRange(y)
	}
	return s
}

func yieldRange(y *wire.Yield) string {
	digits := func(v float64) string { return strconv.FormatFloat(100*v, 'f', 2, 64) }
	return digits(y.Low) + " to " + digits(y.High) + " %"
}

// stripOf collects what is known of a quantity; false if that is nothing.
func stripOf(q *wire.QuantityCorners) (strip, bool) {
	name, unit, factor := quantityForPeople(q.Quantity)
	s := strip{nominal: factor * orNaN(q.Nominal), verdict: verdictWords(q)}
	s.limitLow, s.limitHigh = math.NaN(), math.NaN()
	s.least, s.greatest, s.linearLow, s.linearHigh = worstValue(q.Least, factor), worstValue(q.Greatest, factor), math.NaN(), math.NaN()
	if q.Limit != nil {
		s.limitLow, s.limitHigh = factor*orNaN(q.Limit.Min), factor*orNaN(q.Limit.Max)
	}
	for _, l := range q.Linear {
		s.linearLow, s.linearHigh = lesser(s.linearLow, factor*l.Least), -lesser(-s.linearHigh, -factor*l.Greatest)
	}
	values := []float64{s.nominal, s.limitLow, s.limitHigh, s.least, s.greatest, s.linearLow, s.linearHigh}
	for i := range q.Statistics {
		if h := q.Statistics[i].Histogram; h != nil && len(h.Counts) > 0 {
			scaled := make([]float64, len(h.Edges))
			for k, e := range h.Edges {
				scaled[k] = factor * e
			}
			s.shapes = append(s.shapes, shape{scaled, h.Counts})
			values = append(values, scaled...)
		}
	}
	if !anyFinite(values) {
		return s, false
	}
	s.scale = ranged(name, unit, values).padded(0.04)
	return s, true
}

// lesser ignores what is not a number.
func lesser(a, b float64) float64 {
	switch {
	case math.IsNaN(a):
		return b
	case math.IsNaN(b):
		return a
	}
	return min(a, b)
}

func worstValue(p *wire.WorstPoint, factor float64) float64 {
	if p == nil {
		return math.NaN()
	}
	return factor * orNaN(p.Value)
}

// verdictWords says a verdict with its margin.
func verdictWords(q *wire.QuantityCorners) string {
	s := q.Verdict
	if q.Verdict == "no-limit" {
		return "no limit"
	}
	if q.Margin != nil {
		s += ", margin " + percent(*q.Margin)
	}
	if q.Limit != nil {
		if at := limitPlace(q.Limit); at != worstPlace {
			s += " at " + at
		}
	}
	if q.WithinBand != nil && *q.WithinBand {
		s += ", within the model's band"
	}
	return s
}

// Tornado draws how far each variable alone moves a quantity; nil if that is not
// known.
func Tornado(a *wire.CornersAnswer, quantity string) *Picture {
	q := quantityOf(a, quantity)
	if q == nil || len(q.OneAtATime) == 0 || q.Nominal == nil {
		return nil
	}
	name, unit, factor := quantityForPeople(q.Quantity)
	nominal := factor * *q.Nominal
	rows := slices.Clone(q.OneAtATime)
	width := func(b *wire.TornadoBar) float64 {
		return reach(nominal, factor*orNaN(b.AtMin), factor*orNaN(b.AtMax))
	}
	slices.SortStableFunc(rows, func(x, y wire.TornadoBar) int { return cmp.Compare(width(&y), width(&x)) })
	shown := rows[:min(len(rows), mostBars)]
	for len(shown) > 1 && width(&shown[len(shown)-1]) < leastShare*width(&shown[0]) {
		shown = shown[:len(shown)-1]
	}
	list := &bars{base: nominal, marks: []mark{{x: nominal, label: "nominal " + signed(nominal, unit)}}}
	values := []float64{nominal}
	for i := range shown {
		b := &shown[i]
		lo, hi := factor*orNaN(b.AtMin), factor*orNaN(b.AtMax)
		list.rows = append(list.rows, bar{
			name: variableName(&b.Named), figures: difference(lo-nominal, unit) + " / " + difference(hi-nominal, unit),
			spans: []span{{nominal, lo, seriesTones[0]}, {nominal, hi, seriesTones[4]}}, low: math.NaN(), high: math.NaN(),
		})
		values = append(values, lo, hi)
	}
	list.scale = ranged(name, unit, values).padded(0.05)
	list.limits(q, factor)
	list.legend = []legendItem{{text: "variable at its least", swatch: true, block: seriesTones[0]}, {text: "at its greatest", swatch: true, block: seriesTones[4]}}
	p := &Picture{
		title:       railName(a.Stage) + ": what moves the " + name,
		subtitle:    "each variable alone between its ends, all others typical",
		description: "Horizontal bars about the nominal value " + Figure3(nominal, unit) + ". Greatest: " + list.rows[0].name + ", " + list.rows[0].figures,
		blocks:      []block{list},
	}
	if n := len(rows) - len(shown); n > 0 {
		p.note = countOf(n, "further variable moves", "further variables move") + " it by less."
	}
	return p
}

const (
	mostBars   = 18    // rows of a tornado
	leastShare = 0.002 // of the widest bar; less cannot be seen
)

// limits marks the limits that the scale reaches, and widens it to near ones.
func (b *bars) limits(q *wire.QuantityCorners, factor float64) {
	if q.Limit == nil {
		return
	}
	for _, l := range []struct {
		v    *float64
		side string
	}{{q.Limit.Min, "least allowed "}, {q.Limit.Max, "greatest allowed "}} {
		if l.v == nil {
			continue
		}
		at, span := factor**l.v, b.scale.greatest-b.scale.least
		if at < b.scale.least-span || at > b.scale.greatest+span {
			continue
		}
		b.scale.least, b.scale.greatest = min(b.scale.least, at-0.03*span), max(b.scale.greatest, at+0.03*span)
		b.marks = append(b.marks, mark{x: at, label: l.side + signed(at, b.scale.unit), limit: true})
	}
	slices.SortFunc(b.marks, func(x, y mark) int { return cmp.Compare(x.x, y.x) })
}

// reach is the greatest distance from the nominal value.
func reach(nominal float64, values ...float64) float64 {
	far := 0.0
	for _, v := range values {
		if !math.IsNaN(v) {
			far = max(far, math.Abs(v-nominal))
		}
	}
	return far
}

func difference(v float64, unit string) string {
	if unit == "Cel" {
		unit = "K"
	}
	if v > 0 {
		return "+" + Figure3(v, unit)
	}
	return signed(v, unit)
}

// signed writes a figure as pictures do, with a true minus.
func signed(v float64, unit string) string { return strings.Replace(Figure3(v, unit), "-", "−", 1) }

// variableName writes a pointer for reading, with those that move along.
func variableName(n *wire.Named) string {
	s := strings.TrimPrefix(strings.TrimPrefix(n.Pointer, "/stage/"), "/conditions/")
	if n.Residual != nil && *n.Residual {
		s += ", its own part"
	}
	if k := len(n.With); k > 0 {
		s += " and " + strconv.Itoa(k) + " in its group"
	}
	return s
}

// quantityOf returns the quantity asked for; without a name, the limited one that
// is nearest to its limit.
func quantityOf(a *wire.CornersAnswer, key string) *wire.QuantityCorners {
	var chosen *wire.QuantityCorners
	for i := range a.Quantities {
		q := &a.Quantities[i]
		if key != "" {
			if q.Quantity == key {
				return q
			}
			continue
		}
		if chosen == nil || q.Margin != nil && (chosen.Margin == nil || *q.Margin < *chosen.Margin) {
			chosen = q
		}
	}
	return chosen
}
