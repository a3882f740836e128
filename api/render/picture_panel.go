package render

import (
	"image/color"
	"math"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// panel draws curves over a common horizontal scale: a head with the quantity and
// the names of the curves, the curves, and the labels of the scale below.
type panel struct {
	x, y    scale
	tall    vg.Length // of the field of curves
	curves  []curve
	marks   []mark
	columns *columns
	inset   *panel
	bareX   bool // the panel below has the labels
	gutter  vg.Length
}

// curve is a line through points; NaN interrupts it.
type curve struct {
	name  string
	x, y  []float64
	style draw.LineStyle
	dots  bool
}

// mark is a straight line across the field, or a dot, with a label. A line's other
// coordinate is NaN.
type mark struct {
	x, y  float64
	label string
	limit bool
}

// columns stand on the lower edge of the field, one between each pair of edges.
type columns struct{ edges, tall []float64 }

func (k *columns) draw(f draw.Canvas, x, y func(float64) vg.Length) {
	for i, v := range k.tall {
		if v > 0 {
			fill(f, seriesTones[5], vg.Rectangle{Min: vg.Point{X: x(k.edges[i]), Y: y(0)}, Max: vg.Point{X: x(k.edges[i+1]) - px(0.6), Y: y(v)}})
		}
	}
}

var (
	tickLength  = px(4)
	labelGap    = px(5)
	rightMargin = px(20)
)

func (p *panel) gutterWidth() vg.Length {
	w := vg.Length(0)
	for _, t := range p.yTicks() {
		w = max(w, smallInk.Width(t.label))
	}
	return w + tickLength + labelGap
}

func (p *panel) yTicks() []tick { return p.y.ticks(max(2, int(p.tall/px(27)))) }

// alignPanels gives panels that stand above one another the same field.
func alignPanels(list ...*panel) []block {
	g := vg.Length(0)
	for _, p := range list {
		g = max(g, p.gutterWidth())
	}
	blocks := make([]block, len(list))
	for i, p := range list {
		p.gutter = g
		blocks[i] = p
	}
	return blocks
}

func (p *panel) height(width vg.Length) vg.Length {
	h := p.tall + p.headHeight(width)
	if !p.bareX {
		h += tickLength + 2*lineStep(smallInk)
	}
	return h
}

// head lists what stands above the field, in lines that fit.
func (p *panel) head(width vg.Length) [][]legendItem {
	items := []legendItem{{text: p.y.titled(), head: true}}
	for _, c := range p.curves {
		if c.name != "" {
			items = append(items, legendItem{text: c.name, style: c.style, swatch: true, dots: c.style.Width == 0})
		}
	}
	return flow(items, width)
}

func (p *panel) headHeight(width vg.Length) vg.Length {
	return vg.Length(len(p.head(width)))*legendStep + px(7)
}

func (p *panel) draw(c draw.Canvas) {
	drawLegend(c, p.head(c.Max.X-c.Min.X))
	field := vg.Rectangle{
		Min: vg.Point{X: c.Min.X + p.gutter, Y: c.Max.Y - p.headHeight(c.Max.X-c.Min.X) - p.tall},
		Max: vg.Point{X: c.Max.X - rightMargin, Y: c.Max.Y - p.headHeight(c.Max.X-c.Min.X)},
	}
	f := draw.Canvas{Canvas: c.Canvas, Rectangle: field}
	x, y := p.x.along(field.Min.X, field.Max.X), p.y.along(field.Min.Y, field.Max.Y)
	p.grid(f, x, y)
	if p.columns != nil {
		p.columns.draw(f, x, y)
	}
	var labels labels
	for i := range p.curves {
		labels.curves = append(labels.curves, drawCurve(f, &p.curves[i], x, y)...)
	}
	for i := range p.marks {
		p.mark(f, &p.marks[i], x, y, &labels)
	}
	labels.draw(f)
	if p.inset != nil {
		p.drawInset(f)
	}
}

// grid draws the scales: lines through the field and their labels.
func (p *panel) grid(f draw.Canvas, x, y func(float64) vg.Length) {
	r := f.Rectangle
	for _, t := range p.yTicks() {
		at := y(t.at)
		if t.label == "" {
			continue
		}
		f.StrokeLine2(stroke(gridTone, 1), r.Min.X, at, r.Max.X, at)
		f.StrokeLine2(stroke(axisTone, 1), r.Min.X-tickLength, at, r.Min.X, at)
		write(f, smallInk, r.Min.X-tickLength-labelGap/2, at, draw.XRight, t.label)
	}
	for _, t := range spaced(p.x.ticks(max(2, int((r.Max.X-r.Min.X)/px(80)))), x) {
		at := x(t.at)
		length := tickLength
		if t.label == "" {
			length /= 2
		} else {
			f.StrokeLine2(stroke(gridTone, 1), at, r.Min.Y, at, r.Max.Y)
		}
		if !p.bareX {
			f.StrokeLine2(stroke(axisTone, 1), at, r.Min.Y, at, r.Min.Y-length)
			write(f, smallInk, at, r.Min.Y-tickLength-lineStep(smallInk)/2, draw.XCenter, t.label)
		}
	}
	if !p.bareX {
		write(f, smallInk, r.Max.X, r.Min.Y-tickLength-1.5*lineStep(smallInk), draw.XRight, p.x.titled())
	}
	f.StrokeLine2(stroke(axisTone, 1), r.Min.X, r.Min.Y, r.Max.X, r.Min.Y)
	f.StrokeLine2(stroke(axisTone, 1), r.Min.X, r.Min.Y, r.Min.X, r.Max.Y)
}

// spaced drops labels that would touch the one before.
func spaced(list []tick, at func(float64) vg.Length) []tick {
	end := vg.Length(math.Inf(-1))
	for i := range list {
		half := smallInk.Width(list[i].label) / 2
		if list[i].label == "" {
			continue
		}
		if at(list[i].at)-half < end+px(6) {
			list[i].label = ""
			continue
		}
		end = at(list[i].at) + half
	}
	return list
}

// drawCurve draws a curve and returns the lines that it consists of.
func drawCurve(f draw.Canvas, c *curve, x, y func(float64) vg.Length) [][]vg.Point {
	lines := decimate(c.x, c.y, x, y, px(0.5))
	for _, line := range lines {
		if c.style.Width == 0 {
			break
		}
		if len(line) > 1 {
			f.StrokeLines(c.style, f.ClipLinesXY(line)...)
		}
		if len(line) == 1 && f.Contains(line[0]) {
			dot(f, c.style.Color, line[0], 4)
		}
	}
	if c.dots {
		for i := range c.x {
			if at := (vg.Point{X: x(c.x[i]), Y: y(c.y[i])}); finite(at) && f.Contains(at) {
				dot(f, c.style.Color, at, 3.2)
			}
		}
	}
	return lines
}

func finite(p vg.Point) bool {
	return !math.IsNaN(float64(p.X)+float64(p.Y)) && !math.IsInf(float64(p.X)+float64(p.Y), 0)
}

func dot(c draw.Canvas, tone color.Color, at vg.Point, radius float64) {
	disc := func(tone color.Color, r vg.Length) {
		var path vg.Path
		path.Move(vg.Point{X: at.X + r, Y: at.Y})
		path.Arc(at, r, 0, 2*math.Pi)
		path.Close()
		c.SetColor(tone)
		c.Fill(path)
	}
	disc(paper, px(radius+1.2))
	disc(tone, px(radius))
}

func (p *panel) mark(f draw.Canvas, m *mark, x, y func(float64) vg.Length, all *labels) {
	r := f.Rectangle
	text, line := smallInk, dashed(mutedTone, 1.2)
	text.Color = inkColor
	if m.limit {
		text, line = limitInk, stroke(limitTone, 1.6)
	}
	switch {
	case math.IsNaN(m.y):
		at := x(m.x)
		if !(at >= r.Min.X-1 && at <= r.Max.X+1) {
			return
		}
		f.StrokeLine2(line, at, r.Min.Y, at, r.Max.Y)
		all.add(label{text, m.label, vg.Point{X: at, Y: r.Max.Y - lineStep(text)/2}})
	case math.IsNaN(m.x):
		at := y(m.y)
		if !(at >= r.Min.Y-1 && at <= r.Max.Y+1) {
			return
		}
		f.StrokeLine2(line, r.Min.X, at, r.Max.X, at)
		all.add(label{text, m.label, vg.Point{X: r.Min.X + px(4), Y: at + lineStep(text)/2}})
	default:
		at := vg.Point{X: x(m.x), Y: y(m.y)}
		if !f.Contains(at) {
			return
		}
		dot(f, text.Color, at, 4)
		all.add(label{text, m.label, at})
	}
}

// drawInset puts a small panel into the field's emptier half.
func (p *panel) drawInset(f draw.Canvas) {
	in := p.inset
	r := f.Rectangle
	in.gutter = in.gutterWidth()
	pad := px(8)
	box := vg.Rectangle{Min: vg.Point{X: r.Min.X + px(14), Y: r.Min.Y + px(8)}, Max: vg.Point{X: r.Max.X - px(14)}}
	box.Max.Y = box.Min.Y + in.height(box.Max.X-box.Min.X) + 2*pad
	fill(f, paper, box)
	f.StrokeLines(stroke(axisTone, 1), []vg.Point{box.Min, {X: box.Max.X, Y: box.Min.Y}, box.Max, {X: box.Min.X, Y: box.Max.Y}, box.Min})
	in.draw(draw.Canvas{Canvas: f.Canvas, Rectangle: vg.Rectangle{Min: vg.Point{X: box.Min.X + pad, Y: box.Min.Y + pad}, Max: vg.Point{X: box.Max.X - pad/2, Y: box.Max.Y - pad}}})
}
