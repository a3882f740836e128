package render

import (
	"image/color"
	"math"

	"gonum.org/v1/plot/text"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// label is a text beside a point.
type label struct {
	ink  text.Style
	text string
	at   vg.Point
}

// labels are placed one after another, each where it hides no other and, if there is
// room, no curve.
type labels struct {
	list   []label
	curves [][]vg.Point
}

func (l *labels) add(x label) {
	if x.text != "" {
		l.list = append(l.list, x)
	}
}

func (l *labels) draw(f draw.Canvas) {
	var taken []vg.Rectangle
	for _, x := range l.list {
		text := clip(x.ink, x.text, f.Max.X-f.Min.X-px(8))
		size := vg.Point{X: x.ink.Width(text), Y: lineStep(x.ink)}
		box := l.place(f.Rectangle, x.at, size, taken)
		taken = append(taken, box)
		fill(f, color.NRGBA{paper.R, paper.G, paper.B, 215}, box)
		write(f, x.ink, box.Min.X, (box.Min.Y+box.Max.Y)/2, draw.XLeft, text)
	}
}

// place looks right and left of a point, above it and below, then farther, for a
// place inside the field that is not taken.
func (l *labels) place(field vg.Rectangle, at, size vg.Point, taken []vg.Rectangle) vg.Rectangle {
	gap := px(7)
	var first, second *vg.Rectangle // of any, and of those that are not taken
	for try := range 40 {
		up := 0.8 * vg.Length(try/4+1) * size.Y
		if try%4 >= 2 {
			up = -up
		}
		x := at.X + gap
		if try%2 == 1 {
			x = at.X - gap - size.X
		}
		x = min(max(x, field.Min.X+px(2)), field.Max.X-size.X-px(2))
		y := min(max(at.Y+up-size.Y/2, field.Min.Y), field.Max.Y-size.Y)
		box := vg.Rectangle{Min: vg.Point{X: x, Y: y}, Max: vg.Point{X: x + size.X, Y: y + size.Y}}
		if first == nil {
			first = &box
		}
		over := x < at.X && at.X < x+size.X && y < at.Y && at.Y < y+size.Y // the point itself
		for _, t := range taken {
			over = over || box.Min.X < t.Max.X && t.Min.X < box.Max.X && box.Min.Y < t.Max.Y-0.1 && t.Min.Y < box.Max.Y-0.1
		}
		if over {
			continue
		}
		if second == nil {
			second = &box
		}
		if !l.hides(box) {
			return box
		}
	}
	if second != nil {
		return *second
	}
	return *first
}

// hides reports whether a box lies on a curve.
func (l *labels) hides(box vg.Rectangle) bool {
	for _, line := range l.curves {
		for i := 1; i < len(line); i++ {
			a, b := line[i-1], line[i]
			if max(a.X, b.X) < box.Min.X || min(a.X, b.X) > box.Max.X || max(a.Y, b.Y) < box.Min.Y || min(a.Y, b.Y) > box.Max.Y {
				continue
			}
			along := b.Sub(a)
			least, most := vg.Length(math.Inf(1)), vg.Length(math.Inf(-1))
			for _, corner := range [4]vg.Point{box.Min, {X: box.Max.X, Y: box.Min.Y}, box.Max, {X: box.Min.X, Y: box.Max.Y}} {
				side := cross(along, corner.Sub(a))
				least, most = min(least, side), max(most, side)
			}
			if least <= 0 && most >= 0 {
				return true
			}
		}
	}
	return false
}

// legendItem is a head or the name of a curve with a piece of its line.
type legendItem struct {
	text   string
	head   bool
	swatch bool
	dots   bool
	style  draw.LineStyle
	block  color.Color // a filled swatch instead of a line
}

var (
	legendStep  = px(19)
	swatchWidth = px(26)
)

func (l *legendItem) ink() text.Style {
	if l.head {
		return headInk
	}
	return bodyInk
}

func (l *legendItem) width() vg.Length {
	w := l.ink().Width(l.text)
	if l.swatch {
		w += swatchWidth + px(6)
	}
	return w
}

// flow fills lines with items.
func flow(items []legendItem, width vg.Length) (lines [][]legendItem) {
	at := vg.Length(0)
	for i := range items {
		it := items[i]
		it.text = clip(it.ink(), it.text, width-swatchWidth-px(6))
		w := it.width() + px(18)
		if len(lines) == 0 || at+w-px(18) > width {
			lines, at = append(lines, nil), 0
		}
		lines[len(lines)-1] = append(lines[len(lines)-1], it)
		at += w
	}
	return lines
}

func drawLegend(c draw.Canvas, lines [][]legendItem) {
	y := c.Max.Y - legendStep/2
	for _, line := range lines {
		x := c.Min.X
		for i := range line {
			it := &line[i]
			from := x
			if it.swatch {
				it.drawSwatch(c, x, y)
				from += swatchWidth + px(6)
			}
			write(c, it.ink(), from, y, draw.XLeft, it.text)
			x += it.width() + px(18)
		}
		y -= legendStep
	}
}

func (l *legendItem) drawSwatch(c draw.Canvas, x, y vg.Length) {
	switch {
	case l.block != nil:
		fill(c, l.block, vg.Rectangle{Min: vg.Point{X: x + px(4), Y: y - px(5)}, Max: vg.Point{X: x + swatchWidth, Y: y + px(5)}})
	case l.dots:
		dot(c, l.style.Color, vg.Point{X: x + swatchWidth/2, Y: y}, 4)
	default:
		c.StrokeLine2(l.style, x, y, x+swatchWidth, y)
	}
}
