package render

import (
	"image"
	"image/color"
	"image/draw"
	"math"

	"golang.org/x/image/vector"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/recorder"
)

// painting puts what was drawn on a canvas of dots, whose vertical axis points down.
type painting struct {
	canvas *canvas
	dpi    float64
	tone   *tone
	aside  float64   // [dots] half the width of lines
	dash   []float64 // [dots]
	filler vector.Rasterizer
	faces  faces
}

// newPainting returns blank paper of the given size and dots per inch.
func newPainting(w, h vg.Length, dpi float64) *painting {
	dots := func(v vg.Length) int { return int(v.Dots(dpi) + 0.5) }
	return &painting{canvas: newCanvas(dots(w), dots(h), paper), dpi: dpi, faces: spareFaces.Get().(faces)}
}

// release gives back what the next painting can use.
func (p *painting) release() {
	spareFaces.Put(p.faces)
	p.canvas.release()
}

// mostAsked leaves most of the names of tones to what lies between those asked for.
const mostAsked = 64

// paintAll paints one thing over another. The tones that are asked for are named
// first, so that they are exact.
func (p *painting) paintAll(actions []recorder.Action) {
	for _, a := range actions {
		if c, is := a.(*recorder.SetColor); is && len(p.canvas.tones) < mostAsked {
			p.setTone(c.Color)
		}
	}
	for _, a := range actions {
		p.paint(a)
	}
}

func (p *painting) paint(a recorder.Action) {
	switch a := a.(type) {
	case *recorder.SetColor:
		p.setTone(a.Color)
	case *recorder.SetLineWidth:
		p.aside = a.Width.Dots(p.dpi) / 2
	case *recorder.SetLineDash:
		p.dash = p.dash[:0]
		for _, d := range a.Dashes {
			p.dash = append(p.dash, d.Dots(p.dpi))
		}
	case *recorder.Fill:
		if !p.block(a.Path) {
			p.fill(a.Path)
		}
	case *recorder.Stroke:
		p.stroke(a.Path)
	case *recorder.FillString:
		p.text(a)
	default:
		panic("render: nothing paints " + a.Call())
	}
}

func (p *painting) setTone(c color.Color) {
	p.tone = p.canvas.tone(color.NRGBAModel.Convert(c).(color.NRGBA))
}

// position is where a point lies on the canvas [dots].
type position struct{ x, y float64 }

func (p *painting) at(v vg.Point) position {
	return position{v.X.Dots(p.dpi), float64(p.canvas.tall) - v.Y.Dots(p.dpi)}
}

// block fills an upright rectangle to whole dots and reports whether the path is
// one.
func (p *painting) block(path vg.Path) bool {
	if len(path) != 5 || path[4].Type != vg.CloseComp {
		return false
	}
	a, b, c, d := path[0].Pos, path[1].Pos, path[2].Pos, path[3].Pos
	if path[1].Type != vg.LineComp || path[2].Type != vg.LineComp || path[3].Type != vg.LineComp || a.Y != b.Y || b.X != c.X || c.Y != d.Y || d.X != a.X {
		return false
	}
	one, other := p.at(a), p.at(c)
	ends := func(u, v float64) (from, to int) {
		from, to = int(math.Round(min(u, v))), int(math.Round(max(u, v)))
		return from, max(to, from+1)
	}
	left, right := ends(one.x, other.x)
	top, bottom := ends(one.y, other.y)
	for y := top; y < bottom; y++ {
		p.canvas.cover(y, left, right, p.tone)
	}
	return true
}

// fill paints an area.
func (p *painting) fill(path vg.Path) {
	var corners []position
	for i := range path {
		switch c := &path[i]; c.Type {
		case vg.MoveComp, vg.LineComp:
			corners = append(corners, p.at(c.Pos))
		case vg.ArcComp:
			corners = p.arc(corners, c)
		case vg.CloseComp:
		default:
			panic("render: nothing paints a curve")
		}
	}
	if len(corners) == 0 {
		return
	}
	m := p.maskOf(corners, 0)
	p.filler.Reset(m.wide, m.tall)
	for i, at := range corners {
		x, y := float32(at.x-float64(m.left)), float32(at.y-float64(m.top))
		if i == 0 {
			p.filler.MoveTo(x, y)
		} else {
			p.filler.LineTo(x, y)
		}
	}
	p.filler.ClosePath()
	p.filler.DrawOp = draw.Src
	box := image.Rect(0, 0, m.wide, m.tall)
	p.filler.Draw(&image.Alpha{Pix: m.covered, Stride: m.wide, Rect: box}, box, image.Opaque, image.Point{})
	p.stampOnce(m)
}

// maskOf returns an empty mask for the dots about the points of a path.
func (p *painting) maskOf(path []position, aside float64) *mask {
	least, most := path[0], path[0]
	for _, at := range path {
		least, most = position{min(least.x, at.x), min(least.y, at.y)}, position{max(most.x, at.x), max(most.y, at.y)}
	}
	left, right := dotsWithin(least.x-aside, most.x+aside, p.canvas.wide)
	top, bottom := dotsWithin(least.y-aside, most.y+aside, p.canvas.tall)
	m := &mask{left: left, top: top, wide: max(0, right-left), tall: max(0, bottom-top)}
	m.covered = bytesOf(m.wide * m.tall)
	clear(m.covered)
	return m
}

func (p *painting) stampOnce(m *mask) {
	p.canvas.stamp(m, 0, 0, p.tone)
	keep(m.covered)
}

// arcChords is the number of chords of a whole turn; from the arc of the largest
// dot they are a twentieth of a dot away.
const arcChords = 32

func (p *painting) arc(corners []position, c *vg.PathComp) []position {
	n := int(math.Ceil(arcChords * math.Abs(c.Angle) / (2 * math.Pi)))
	centre, radius := p.at(c.Pos), c.Radius.Dots(p.dpi)
	for k := range n + 1 {
		sin, cos := math.Sincos(c.Start + c.Angle*float64(k)/float64(n))
		corners = append(corners, position{centre.x + radius*cos, centre.y - radius*sin})
	}
	return corners
}

// stroke draws the lines of a path one after another.
func (p *painting) stroke(path vg.Path) {
	for len(path) > 0 {
		line := []position{p.at(path[0].Pos)}
		for path = path[1:]; len(path) > 0 && path[0].Type == vg.LineComp; path = path[1:] {
			line = append(line, p.at(path[0].Pos))
		}
		if len(path) > 0 && path[0].Type != vg.MoveComp {
			panic("render: nothing strokes a curve")
		}
		m := p.maskOf(line, p.aside+1)
		(&brush{m, p.aside}).line(line, p.dash)
		p.stampOnce(m)
	}
}

// text sets letters with their feet on whole dots.
func (p *painting) text(a *recorder.FillString) {
	face := p.faces.face(a.Font, p.dpi)
	at := p.at(a.Point)
	foot := int(math.Round(at.y))
	pen := pen{widths: face.widths}
	for _, r := range a.String {
		gap, advance := pen.step(r)
		at.x += float64(gap) * face.unit
		l, x := face.letter(r, at.x)
		p.canvas.stamp(l, x, foot, p.tone)
		at.x += float64(advance) * face.unit
	}
}

// dotsWithin returns the dots from one place up to another, of n.
func dotsWithin(from, to float64, n int) (first, end int) {
	return int(math.Floor(max(0, from))), int(math.Ceil(min(to, float64(n))))
}
