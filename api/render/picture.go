package render

import (
	"image/color"
	"strings"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
	"gonum.org/v1/plot/vg/recorder"
)

// Picture is a composition of blocks under a title, ready to be written at any
// width. It carries its own background, so it stands on light and dark pages.
type Picture struct {
	title, subtitle string
	description     string // for screen readers: what is to be seen, in figures
	blocks          []block
	note            string // small, below
}

// block is one part of a picture, as wide as the picture.
type block interface {
	height(width vg.Length) vg.Length
	draw(c draw.Canvas)
}

// Widths of a picture.
const (
	DefaultWidth = 800  // [px]
	LeastWidth   = 320  // [px]
	MostWidth    = 2400 // [px]
)

// px is a length on screen at 96 pixels per inch.
func px(n float64) vg.Length { return vg.Length(0.75 * n) }

var (
	pictureMargin = px(18)
	blockGap      = px(14)
)

// bound keeps a width within what is drawn; 0 is the default.
func bound(width int) int {
	if width == 0 {
		return DefaultWidth
	}
	return min(max(width, LeastWidth), MostWidth)
}

// lines of the title, subtitle and note at a width.
func (p *Picture) lines(width vg.Length) (title, subtitle, note []string) {
	return wrap(titleInk, p.title, width, 2), wrap(mutedInk, p.subtitle, width, 3), wrap(smallInk, p.note, width, 6)
}

func (p *Picture) size(width int) (w, h vg.Length) {
	w = px(float64(width))
	inner := w - 2*pictureMargin
	title, subtitle, note := p.lines(inner)
	h = 2*pictureMargin + textHeight(titleInk, title) + textHeight(mutedInk, subtitle)
	for _, b := range p.blocks {
		h += blockGap + b.height(inner)
	}
	if len(note) > 0 {
		h += blockGap/2 + textHeight(smallInk, note)
	}
	return w, h
}

// record lists what is drawn over the paper.
func (p *Picture) record(w, h vg.Length) []recorder.Action {
	var c recorder.Canvas
	p.draw(draw.NewCanvas(&c, w, h))
	return c.Actions
}

// draw paints the picture over the whole canvas, which has the background.
func (p *Picture) draw(c draw.Canvas) {
	in := draw.Crop(c, pictureMargin, -pictureMargin, pictureMargin, -pictureMargin)
	width := in.Max.X - in.Min.X
	title, subtitle, note := p.lines(width)
	y := writeLines(in, titleInk, title, in.Max.Y)
	y = writeLines(in, mutedInk, subtitle, y)
	for _, b := range p.blocks {
		h := b.height(width)
		y -= blockGap
		b.draw(draw.Canvas{Canvas: in.Canvas, Rectangle: vg.Rectangle{Min: vg.Point{X: in.Min.X, Y: y - h}, Max: vg.Point{X: in.Max.X, Y: y}}})
		y -= h
	}
	writeLines(in, smallInk, note, y-blockGap/2)
}

// describe joins sentences that are not empty.
func describe(sentences ...string) string {
	var b strings.Builder
	for _, s := range sentences {
		if s == "" {
			continue
		}
		if b.Len() > 0 {
			b.WriteByte(' ')
		}
		b.WriteString(strings.TrimSuffix(s, "."))
		b.WriteByte('.')
	}
	return b.String()
}

func fill(c draw.Canvas, tone color.Color, r vg.Rectangle) {
	c.SetColor(tone)
	c.Fill(r.Path())
}
