package render

import (
	"image"
	"image/color"
	"image/draw"
	"math"
	"slices"
	"sync"

	"git.sr.ht/~sbinet/gg"
	"golang.org/x/image/math/fixed"
	"gonum.org/v1/plot/font"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/recorder"

	xfont "golang.org/x/image/font"
)

// raster paints what was drawn on an image, whose vertical axis points down. It
// takes its memory from the picture before, fills rectangles as such, and sets
// letters straight from their outlines.
type raster struct {
	dots    *image.RGBA
	scale   float64 // [dots] of a point
	context *gg.Context
	tone    color.Color
	tones   []color.RGBA // opaque ones that were used, each once
	dash    []float64    // [dots]
	faces   map[font.Font]xfont.Face
}

// newRaster returns paper of the given size and dots per inch.
func newRaster(w, h vg.Length, dpi int) *raster {
	wide, tall := int(w.Dots(float64(dpi))+0.5), int(h.Dots(float64(dpi))+0.5)
	r := &raster{
		dots:  &image.RGBA{Pix: bytesOf(4 * wide * tall), Stride: 4 * wide, Rect: image.Rect(0, 0, wide, tall)},
		scale: float64(dpi) / float64(vg.Inch), faces: map[font.Font]xfont.Face{},
	}
	draw.Draw(r.dots, r.dots.Rect, image.NewUniform(paper), image.Point{}, draw.Src)
	r.context = gg.NewContextForRGBA(r.dots)
	r.context.SetLineCapButt()
	return r
}

// release gives back what the image and its index image are made of.
func (r *raster) release(m *image.Paletted) {
	keep(r.dots.Pix)
	keep(m.Pix)
}

func (r *raster) write(a recorder.Action) {
	switch a := a.(type) {
	case *recorder.SetColor:
		r.setTone(a.Color)
	case *recorder.SetLineWidth:
		r.context.SetLineWidth(float64(a.Width) * r.scale)
	case *recorder.SetLineDash:
		r.dash = r.dash[:0]
		for _, d := range a.Dashes {
			r.dash = append(r.dash, float64(d)*r.scale)
		}
		r.context.SetDash(r.dash...)
	case *recorder.Fill:
		if !r.block(a.Path) {
			r.outline(a.Path)
			r.context.Fill()
		}
	case *recorder.Stroke:
		r.stroke(a.Path)
	case *recorder.FillString:
		r.text(a)
	default:
		panic("render: nothing paints " + a.Call())
	}
}

// mostTones leaves most of the names of an index image to what lies between tones.
const mostTones = 64

func (r *raster) setTone(tone color.Color) {
	r.tone = tone
	r.context.SetColor(tone)
	if t := color.RGBAModel.Convert(tone).(color.RGBA); t.A == 255 && len(r.tones) < mostTones && !slices.Contains(r.tones, t) {
		r.tones = append(r.tones, t)
	}
}

func (r *raster) x(v vg.Length) float64 { return float64(v) * r.scale }
func (r *raster) y(v vg.Length) float64 { return float64(r.dots.Rect.Dy()) - float64(v)*r.scale }

// block fills an upright rectangle to whole dots and reports whether the path is
// one.
func (r *raster) block(p vg.Path) bool {
	if len(p) != 5 || p[4].Type != vg.CloseComp {
		return false
	}
	a, b, c, d := p[0].Pos, p[1].Pos, p[2].Pos, p[3].Pos
	if p[1].Type != vg.LineComp || p[2].Type != vg.LineComp || p[3].Type != vg.LineComp || a.Y != b.Y || b.X != c.X || c.Y != d.Y || d.X != a.X {
		return false
	}
	whole := func(v float64) int { return int(math.Round(v)) }
	box := image.Rect(whole(r.x(a.X)), whole(r.y(a.Y)), whole(r.x(c.X)), whole(r.y(c.Y)))
	if box.Dx() == 0 {
		box.Max.X++
	}
	if box.Dy() == 0 {
		box.Max.Y++
	}
	draw.Draw(r.dots, box, image.NewUniform(r.tone), image.Point{}, draw.Over)
	return true
}

// pieceLength is the number of points of a line that are stroked at once. The
// rasteriser looks through all that lies on a row of dots for each dot that it adds:
// a ripple of hundreds of periods in one piece takes ten times as long.
const pieceLength = 16

// stroke draws the lines of a path one after another.
func (r *raster) stroke(p vg.Path) {
	for len(p) > 0 {
		end := 1
		for end < len(p) && p[end].Type != vg.MoveComp {
			end++
		}
		r.line(p[:end])
		p = p[end:]
	}
}

// line draws a line. A long one is drawn in pieces that begin a point before the
// last one ended, so that each corner is rounded in one of them, and whose dashes go
// on where they were.
func (r *raster) line(p vg.Path) {
	walked := 0.0 // [dots]
	for len(p) > pieceLength {
		r.piece(p[:pieceLength], walked)
		for k := 1; k < pieceLength-1; k++ {
			d := p[k].Pos.Sub(p[k-1].Pos)
			walked += r.scale * math.Hypot(float64(d.X), float64(d.Y))
		}
		p = p[pieceLength-2:]
	}
	r.piece(p, walked)
}

func (r *raster) piece(p vg.Path, walked float64) {
	r.context.SetDashOffset(walked)
	r.context.MoveTo(r.x(p[0].Pos.X), r.y(p[0].Pos.Y))
	r.outline(p[1:])
	r.context.Stroke()
}

func (r *raster) outline(path vg.Path) {
	for i := range path {
		switch c := &path[i]; c.Type {
		case vg.MoveComp:
			r.context.MoveTo(r.x(c.Pos.X), r.y(c.Pos.Y))
		case vg.LineComp:
			r.context.LineTo(r.x(c.Pos.X), r.y(c.Pos.Y))
		case vg.ArcComp:
			r.context.DrawArc(r.x(c.Pos.X), r.y(c.Pos.Y), r.x(c.Radius), -c.Start, -c.Start-c.Angle)
		case vg.CloseComp:
			r.context.ClosePath()
		default:
			panic("render: nothing paints a curve")
		}
	}
}

func (r *raster) text(a *recorder.FillString) {
	face, known := r.faces[a.Font]
	if !known {
		outlines := fonts.Lookup(a.Font, a.Size)
		face = outlines.FontFace(r.scale * float64(vg.Inch))
		r.faces[a.Font] = face
	}
	pen := xfont.Drawer{Dst: r.dots, Src: image.NewUniform(r.tone), Face: face}
	pen.Dot = fixed.Point26_6{X: fixed.Int26_6(64*r.x(a.Point.X) + 0.5), Y: fixed.Int26_6(64*r.y(a.Point.Y) + 0.5)}
	pen.DrawString(a.String)
}

var spare sync.Pool // of *[]byte

// bytesOf returns n bytes of any content.
func bytesOf(n int) []byte {
	if kept, is := spare.Get().(*[]byte); is && cap(*kept) >= n {
		return (*kept)[:n]
	}
	return make([]byte, n)
}

func keep(b []byte) { spare.Put(&b) }
