package render

import (
	"image/color"
	"math"
	"slices"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// strips draws one quantity below the other, each over a scale of its own.
type strips struct {
	rows    []strip
	windows bool // limits and a choice only
}

// strip is what is known of one quantity, in the unit of its scale; NaN: nothing.
type strip struct {
	scale                 scale
	nominal               float64
	least, greatest       float64 // worst points found
	linearLow, linearHigh float64 // root-sum-square
	limitLow, limitHigh   float64
	shapes                []shape // distribution at each condition corner
	verdict               string
}

// shape is a histogram.
type shape struct {
	edges  []float64
	counts []int
}

var (
	stripHead  = px(20)
	stripField = px(50)
	stripTall  = stripHead + stripField + tickLength + lineStep(smallInk) + px(10)
)

var (
	shapeTone   = color.NRGBA{86, 180, 233, 105}
	linearTone  = seriesTones[1]
	extremeTone = seriesTones[0]
)

func (s *strips) legend() []legendItem {
	if s.windows {
		return []legendItem{{text: "chosen, as it is effective", swatch: true, style: stroke(inkColor, 2)}, {text: "end of the window", swatch: true, style: stroke(limitTone, 2)}}
	}
	return []legendItem{
		{text: "distribution", swatch: true, block: color.RGBA{176, 217, 241, 255}},
		{text: "root-sum-square", swatch: true, block: linearTone},
		{text: "worst points found", swatch: true, block: extremeTone},
		{text: "nominal", swatch: true, style: stroke(inkColor, 2)},
		{text: "limit", swatch: true, style: stroke(limitTone, 2)},
	}
}

func (s *strips) height(width vg.Length) vg.Length {
	return vg.Length(len(flow(s.legend(), width)))*legendStep + vg.Length(len(s.rows))*stripTall
}

func (s *strips) draw(c draw.Canvas) {
	lines := flow(s.legend(), c.Max.X-c.Min.X)
	drawLegend(c, lines)
	top := c.Max.Y - vg.Length(len(lines))*legendStep
	for i := range s.rows {
		s.rows[i].draw(c, top-vg.Length(i)*stripTall-px(8))
	}
}

func (s *strip) draw(c draw.Canvas, top vg.Length) {
	width := c.Max.X - c.Min.X
	verdict := clip(bodyInk, s.verdict, max(0.55*width, width-headInk.Width(s.scale.titled())-px(16)))
	write(c, headInk, c.Min.X, top-stripHead/2, draw.XLeft, clip(headInk, s.scale.titled(), width-bodyInk.Width(verdict)-px(12)))
	write(c, bodyInk, c.Max.X, top-stripHead/2, draw.XRight, verdict)
	side := px(16)
	f := draw.Canvas{Canvas: c.Canvas, Rectangle: vg.Rectangle{
		Min: vg.Point{X: c.Min.X + side, Y: top - stripHead - stripField}, Max: vg.Point{X: c.Max.X - side, Y: top - stripHead},
	}}
	x := s.scale.along(f.Min.X, f.Max.X)
	fill(f, color.White, f.Rectangle)
	s.forbidden(f, x)
	for _, t := range spaced(s.scale.ticks(max(2, int((f.Max.X-f.Min.X)/px(80)))), x) {
		f.StrokeLine2(stroke(gridTone, 1), x(t.at), f.Min.Y, x(t.at), f.Max.Y)
		f.StrokeLine2(stroke(axisTone, 1), x(t.at), f.Min.Y, x(t.at), f.Min.Y-tickLength)
		write(f, smallInk, x(t.at), f.Min.Y-tickLength-lineStep(smallInk)/2, draw.XCenter, t.label)
	}
	f.StrokeLine2(stroke(axisTone, 1), f.Min.X, f.Min.Y, f.Max.X, f.Min.Y)
	for _, h := range s.shapes {
		h.draw(f, x, f.Min.Y+px(22), f.Max.Y-px(2))
	}
	bridge(f, x, s.linearLow, s.linearHigh, f.Min.Y+px(15), linearTone)
	least, greatest := s.least, s.greatest
	if math.IsNaN(least) != math.IsNaN(greatest) { // only one side was searched
		least, greatest = lesser(s.least, s.nominal), -lesser(-s.greatest, -s.nominal)
	}
	bridge(f, x, least, greatest, f.Min.Y+px(6), extremeTone)
	s.line(f, x, s.nominal, stroke(inkColor, 2))
	s.line(f, x, s.limitLow, stroke(limitTone, 2))
	s.line(f, x, s.limitHigh, stroke(limitTone, 2))
}

// forbidden hatches what lies beyond the limits.
func (s *strip) forbidden(f draw.Canvas, x func(float64) vg.Length) {
	if !math.IsNaN(s.limitLow) {
		hatch(f, vg.Rectangle{Min: f.Min, Max: vg.Point{X: max(x(s.limitLow), f.Min.X), Y: f.Max.Y}})
	}
	if !math.IsNaN(s.limitHigh) {
		hatch(f, vg.Rectangle{Min: vg.Point{X: min(x(s.limitHigh), f.Max.X), Y: f.Min.Y}, Max: f.Max})
	}
}

func (s *strip) line(f draw.Canvas, x func(float64) vg.Length, at float64, style draw.LineStyle) {
	if !math.IsNaN(at) {
		f.StrokeLine2(style, x(at), f.Min.Y, x(at), f.Max.Y)
	}
}

// bridge draws a bar from one value to another, with a dot where they are equal.
func bridge(f draw.Canvas, x func(float64) vg.Length, from, to float64, y vg.Length, tone color.Color) {
	if math.IsNaN(from) || math.IsNaN(to) {
		return
	}
	a, b := x(from), x(to)
	if b-a < px(3) {
		dot(f, tone, vg.Point{X: (a + b) / 2, Y: y}, 3)
		return
	}
	fill(f, tone, vg.Rectangle{Min: vg.Point{X: a, Y: y - px(2.5)}, Max: vg.Point{X: b, Y: y + px(2.5)}})
}

// draw fills the outline of a histogram between two heights.
func (h *shape) draw(f draw.Canvas, x func(float64) vg.Length, bottom, top vg.Length) {
	most := slices.Max(h.counts)
	if most == 0 {
		return
	}
	points := []vg.Point{{X: x(h.edges[0]), Y: bottom}}
	for i, n := range h.counts {
		y := bottom + vg.Length(n)/vg.Length(most)*(top-bottom)
		points = append(points, vg.Point{X: x(h.edges[i]), Y: y}, vg.Point{X: x(h.edges[i+1]), Y: y})
	}
	points = append(points, vg.Point{X: x(h.edges[len(h.counts)]), Y: bottom})
	f.FillPolygon(shapeTone, f.ClipPolygonXY(points))
}
