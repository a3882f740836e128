package render

import (
	"image/color"
	"math"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// bars draws horizontal bars, one below the other, over one scale.
type bars struct {
	scale  scale
	base   float64 // where bars begin
	rows   []bar
	marks  []mark // lines at x
	legend []legendItem
}

// bar is one row: a heading, or a name, a bar and what it says in figures.
type bar struct {
	name    string
	figures string
	heading bool
	spans   []span
	low     float64 // whisker; NaN: none
	high    float64
}

// span is one piece of a bar.
type span struct {
	from, to float64
	tone     color.Color
}

var (
	barStep   = px(21)
	barHeight = px(12)
)

func (b *bars) height(width vg.Length) vg.Length {
	h := b.rowsHeight(width) + tickLength + 2*lineStep(smallInk)
	if lines := flow(b.legend, width); len(lines) > 0 {
		h += vg.Length(len(lines))*legendStep + px(4)
	}
	if b.marked() {
		h += lineStep(limitInk) + px(2)
	}
	return h
}

func (b *bars) marked() bool {
	for _, m := range b.marks {
		if m.label != "" {
			return true
		}
	}
	return false
}

// stacked tells that names leave no room for bars beside them: they stand above.
func (b *bars) stacked(width vg.Length) bool {
	names, figures := b.textWidths()
	return names+figures > 0.62*width
}

func (b *bars) step(r *bar, width vg.Length) vg.Length {
	if b.stacked(width) && !r.heading {
		return 2*barStep - px(4)
	}
	return barStep
}

func (b *bars) rowsHeight(width vg.Length) (h vg.Length) {
	for i := range b.rows {
		h += b.step(&b.rows[i], width)
	}
	return h
}

func (b *bars) textWidths() (names, figures vg.Length) {
	for _, r := range b.rows {
		if !r.heading {
			names = max(names, bodyInk.Width(plain(r.name)))
		}
		figures = max(figures, bodyInk.Width(r.figures))
	}
	return names + px(20), figures + px(10)
}

// columns returns the widths beside the bars of names and figures.
func (b *bars) columns(width vg.Length) (names, figures vg.Length) {
	names, figures = b.textWidths()
	if b.stacked(width) {
		return px(8), min(figures, 0.5*width)
	}
	return names, figures
}

func (b *bars) draw(c draw.Canvas) {
	width := c.Max.X - c.Min.X
	names, figures := b.columns(width)
	top := c.Max.Y
	if lines := flow(b.legend, width); len(lines) > 0 {
		drawLegend(c, lines)
		top -= vg.Length(len(lines))*legendStep + px(4)
	}
	markY := top - lineStep(limitInk)/2
	if b.marked() {
		top -= lineStep(limitInk) + px(2)
	}
	field := vg.Rectangle{Min: vg.Point{X: c.Min.X + names, Y: top - b.rowsHeight(width)}, Max: vg.Point{X: c.Max.X - figures, Y: top}}
	x := b.scale.along(field.Min.X, field.Max.X)
	b.grid(c, field, x)
	at := x(b.base)
	c.StrokeLine2(stroke(axisTone, 1.2), at, field.Min.Y, at, field.Max.Y)
	y := top
	for i := range b.rows {
		r := &b.rows[i]
		step := b.step(r, width)
		middle := y - step + barStep/2
		switch {
		case r.heading:
			b.heading(c, r, middle)
		case step > barStep:
			b.row(c, r, middle+px(3), x)
			write(c, bodyInk, c.Max.X, middle+px(3), draw.XRight, clip(bodyInk, r.figures, figures))
		default:
			write(c, bodyInk, c.Min.X+px(8), middle, draw.XLeft, r.name)
			b.row(c, r, middle, x)
			write(c, bodyInk, c.Max.X, middle, draw.XRight, r.figures)
		}
		y -= step
	}
	b.lines(c, field, markY, x)
	if b.stacked(width) {
		b.namesAbove(c, top, width)
	}
}

// namesAbove writes the names over the lines of the field, each above its bar.
func (b *bars) namesAbove(c draw.Canvas, y, width vg.Length) {
	for i := range b.rows {
		if r := &b.rows[i]; !r.heading {
			name := clip(bodyInk, r.name, width-px(8))
			fill(c, paper, vg.Rectangle{Min: vg.Point{X: c.Min.X, Y: y - barStep + px(3)}, Max: vg.Point{X: c.Min.X + px(12) + bodyInk.Width(name), Y: y}})
			write(c, bodyInk, c.Min.X+px(8), y-barStep/2+px(2), draw.XLeft, name)
		}
		y -= b.step(&b.rows[i], width)
	}
}

// heading writes the row's name over the lines of the field.
func (b *bars) heading(c draw.Canvas, r *bar, y vg.Length) {
	name := clip(headInk, r.name, c.Max.X-c.Min.X-headInk.Width(r.figures)-px(12))
	fill(c, paper, vg.Rectangle{Min: vg.Point{X: c.Min.X, Y: y - barStep/2}, Max: vg.Point{X: c.Min.X + headInk.Width(name) + px(6), Y: y + barStep/2}})
	write(c, headInk, c.Min.X, y, draw.XLeft, name)
	write(c, headInk, c.Max.X, y, draw.XRight, r.figures)
}

func (b *bars) row(c draw.Canvas, r *bar, y vg.Length, x func(float64) vg.Length) {
	for _, s := range r.spans {
		from, to := x(min(s.from, s.to)), x(max(s.from, s.to))
		if !(from < to) {
			continue
		}
		fill(c, s.tone, vg.Rectangle{Min: vg.Point{X: from, Y: y - barHeight/2}, Max: vg.Point{X: max(to, from+px(0.7)), Y: y + barHeight/2}})
	}
	if !math.IsNaN(r.low) && !math.IsNaN(r.high) && r.low < r.high {
		from, to := x(r.low), x(r.high)
		line := stroke(inkColor, 1.2)
		c.StrokeLine2(line, from, y, to, y)
		c.StrokeLine2(line, from, y-px(3), from, y+px(3))
		c.StrokeLine2(line, to, y-px(3), to, y+px(3))
	}
}

func (b *bars) grid(c draw.Canvas, field vg.Rectangle, x func(float64) vg.Length) {
	for _, t := range spaced(b.scale.ticks(max(2, int((field.Max.X-field.Min.X)/px(50)))), x) {
		at := x(t.at)
		if t.label == "" {
			continue
		}
		c.StrokeLine2(stroke(gridTone, 1), at, field.Min.Y, at, field.Max.Y)
		c.StrokeLine2(stroke(axisTone, 1), at, field.Min.Y, at, field.Min.Y-tickLength)
		write(c, smallInk, at, field.Min.Y-tickLength-lineStep(smallInk)/2, draw.XCenter, t.label)
	}
	c.StrokeLine2(stroke(axisTone, 1), field.Min.X, field.Min.Y, field.Max.X, field.Min.Y)
	title := b.scale.titled()
	write(c, smallInk, max(field.Max.X, c.Min.X+smallInk.Width(title)), field.Min.Y-tickLength-1.5*lineStep(smallInk), draw.XRight, title)
}

// lines draws the marks with their labels above the field.
func (b *bars) lines(c draw.Canvas, field vg.Rectangle, markY vg.Length, x func(float64) vg.Length) {
	end := c.Min.X - px(8)
	for _, m := range b.marks {
		at := x(m.x)
		if !(at >= field.Min.X-1 && at <= field.Max.X+1) {
			continue
		}
		text, line := smallInk, dashed(mutedTone, 1.2)
		if m.limit {
			text, line = limitInk, stroke(limitTone, 1.6)
		}
		c.StrokeLine2(line, at, field.Min.Y, at, field.Max.Y)
		label := clip(text, m.label, c.Max.X-end-px(8))
		half := text.Width(label) / 2
		middle := min(max(at, c.Min.X+half, end+px(8)+half), c.Max.X-half)
		write(c, text, middle, markY, draw.XCenter, label)
		end = middle + half
	}
}
