package render

import (
	"bytes"
	"encoding/xml"
	"fmt"
	"image/color"
	"math"
	"strconv"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/recorder"

	xfont "golang.org/x/image/font"
)

// SVG writes the picture, width in pixels. The text stays text, in a face that is
// named with those that take its place where it is missing; each is told how long
// to be, so that none is cut in a wider face.
func (p *Picture) SVG(width int) []byte {
	width = bound(width)
	w, h := p.size(width)
	s := &scribe{tall: h}
	fmt.Fprintf(&s.out, `<svg xmlns="http://www.w3.org/2000/svg" role="img" width="%d" height="%.0f" viewBox="0 0 %.6g %.6g" font-family="'Liberation Sans',Arimo,Arial,Helvetica,sans-serif" style="max-width:100%%;height:auto"><title>`, width, h/px(1), w, h)
	s.escape(p.title)
	s.out.WriteString("</title><desc>")
	s.escape(describe(p.subtitle, p.description, p.note))
	s.out.WriteString("</desc>\n")
	s.tone = paper
	s.path((vg.Rectangle{Max: vg.Point{X: w, Y: h}}).Path())
	s.paint("fill")
	s.out.WriteString("/>\n")
	for _, a := range p.record(w, h) {
		s.write(a)
	}
	s.out.WriteString("</svg>\n")
	return s.out.Bytes()
}

// scribe writes what was drawn as elements of SVG, whose vertical axis points down.
type scribe struct {
	out   bytes.Buffer
	tall  vg.Length
	tone  color.Color
	width vg.Length
	dash  []vg.Length
}

func (s *scribe) write(a recorder.Action) {
	switch a := a.(type) {
	case *recorder.SetColor:
		s.tone = a.Color
	case *recorder.SetLineWidth:
		s.width = a.Width
	case *recorder.SetLineDash:
		s.dash = a.Dashes
	case *recorder.Fill:
		s.path(a.Path)
		s.paint("fill")
		s.out.WriteString("/>\n")
	case *recorder.Stroke:
		s.path(a.Path)
		s.out.WriteString(` fill="none"`)
		s.paint("stroke")
		s.attribute("stroke-width", s.width)
		if len(s.dash) > 0 {
			s.attribute("stroke-dasharray", s.dash...)
		}
		s.out.WriteString("/>\n")
	case *recorder.FillString:
		s.text(a)
	default:
		panic("render: no element of SVG for " + a.Call())
	}
}

func (s *scribe) text(a *recorder.FillString) {
	face := fonts.Lookup(a.Font, a.Size)
	s.out.WriteString("<text")
	s.attribute("x", a.Point.X)
	s.attribute("y", s.tall-a.Point.Y)
	s.attribute("font-size", a.Size)
	if a.Font.Weight == xfont.WeightBold {
		s.out.WriteString(` font-weight="bold"`)
	}
	s.paint("fill")
	m := widthsOf(face)
	s.attribute("textLength", vg.Length(m.of(a.String))*a.Size/vg.Length(m.em))
	s.out.WriteString(` lengthAdjust="spacingAndGlyphs">`)
	s.escape(a.String)
	s.out.WriteString("</text>\n")
}

// paint writes the present tone as a fill or a stroke.
func (s *scribe) paint(what string) {
	t := color.NRGBAModel.Convert(s.tone).(color.NRGBA)
	fmt.Fprintf(&s.out, ` %s="#%02x%02x%02x"`, what, t.R, t.G, t.B)
	if t.A < 255 {
		s.attribute(what+"-opacity", vg.Length(t.A)/255)
	}
}

func (s *scribe) attribute(name string, values ...vg.Length) {
	s.out.WriteByte(' ')
	s.out.WriteString(name)
	s.out.WriteString(`="`)
	for i, v := range values {
		if i > 0 {
			s.out.WriteByte(' ')
		}
		s.number(v)
	}
	s.out.WriteByte('"')
}

// number writes two decimals at most: a hundredth of a point.
func (s *scribe) number(v vg.Length) {
	n := int(math.Round(100 * float64(v)))
	if n < 0 {
		s.out.WriteByte('-')
		n = -n
	}
	s.out.Write(strconv.AppendInt(s.out.AvailableBuffer(), int64(n/100), 10))
	if n %= 100; n == 0 {
		return
	}
	s.out.Write([]byte{'.', byte('0' + n/10)})
	if n%10 > 0 {
		s.out.WriteByte(byte('0' + n%10))
	}
}

func (s *scribe) point(command byte, x, y vg.Length) {
	s.out.WriteByte(command)
	s.number(x)
	s.out.WriteByte(',')
	s.number(s.tall - y)
}

func (s *scribe) path(path vg.Path) {
	s.out.WriteString(`<path d="`)
	for i := range path {
		switch c := &path[i]; c.Type {
		case vg.MoveComp:
			s.point('M', c.Pos.X, c.Pos.Y)
		case vg.LineComp:
			s.point('L', c.Pos.X, c.Pos.Y)
		case vg.ArcComp: // one arc cannot end where it begins
			s.arc(c, c.Start+c.Angle/2)
			s.arc(c, c.Start+c.Angle)
		case vg.CloseComp:
			s.out.WriteByte('Z')
		default:
			panic("render: no command of SVG for a curve")
		}
	}
	s.out.WriteByte('"')
}

// arc writes a piece of a circle, at most half of it, against the clock.
func (s *scribe) arc(c *vg.PathComp, to float64) {
	s.out.WriteByte('A')
	s.number(c.Radius)
	s.out.WriteByte(',')
	s.number(c.Radius)
	s.out.WriteString(" 0 0 0")
	s.point(' ', c.Pos.X+c.Radius*vg.Length(math.Cos(to)), c.Pos.Y+c.Radius*vg.Length(math.Sin(to)))
}

func (s *scribe) escape(text string) { _ = xml.EscapeText(&s.out, []byte(plain(text))) }
