package render

import (
	"bytes"
	"encoding/xml"
	"fmt"
	"image"
	"image/color"
	"image/png"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
	"gonum.org/v1/plot/vg/vgimg"
	"gonum.org/v1/plot/vg/vgsvg"
)

// SVG writes the picture, width in pixels. The text stays text: it names a face
// and those that take its place where it is missing.
func (p *Picture) SVG(width int) []byte {
	width = bound(width)
	w, h := p.size(width)
	canvas := vgsvg.New(w, h)
	whole := draw.New(canvas)
	fill(whole, paper, whole.Rectangle)
	p.draw(whole)
	var raw, out bytes.Buffer
	// a buffer takes every write; an error cannot come up
	_, _ = canvas.WriteTo(&raw)
	body := raw.Bytes()
	_, body, _ = bytes.Cut(body, []byte("<svg"))
	_, body, _ = bytes.Cut(body, []byte(">"))
	fmt.Fprintf(&out, `<svg xmlns="http://www.w3.org/2000/svg" role="img" width="%d" height="%.0f" viewBox="0 0 %.6g %.6g" style="max-width:100%%;height:auto"><title>`, width, h/px(1), w, h)
	escapeXML(&out, p.title)
	out.WriteString("</title><desc>")
	escapeXML(&out, describe(p.subtitle, p.description, p.note))
	out.WriteString("</desc>")
	out.Write(shortened(body))
	return out.Bytes()
}

func escapeXML(to *bytes.Buffer, s string) { _ = xml.EscapeText(to, []byte(plain(s))) }

// shortened names the faces as pages do, and leaves out what is the default.
func shortened(svg []byte) []byte {
	svg = bytes.ReplaceAll(svg, []byte("font-family:Liberation Sans;font-variant:none;"), []byte("font-family:'Liberation Sans',Arimo,Arial,Helvetica,sans-serif;"))
	svg = bytes.ReplaceAll(svg, []byte("font-family:Liberation Sans;font-variant:normal;"), []byte("font-family:'Liberation Sans',Arimo,Arial,Helvetica,sans-serif;"))
	svg = bytes.ReplaceAll(svg, []byte("font-weight:normal;font-style:normal;"), nil)
	svg = bytes.ReplaceAll(svg, []byte("font-style:normal;"), nil)
	return bytes.ReplaceAll(svg, []byte("\n\tstyle"), []byte(" style"))
}

// PNG writes the picture with two dots for a pixel, as fine screens and paper
// want it.
func (p *Picture) PNG(width int) []byte {
	width = bound(width)
	w, h := p.size(width)
	dots := 192
	if width > 1200 {
		dots = 96
	}
	canvas := vgimg.NewWith(vgimg.UseWH(w, h), vgimg.UseDPI(dots), vgimg.UseBackgroundColor(paper))
	p.draw(draw.New(canvas))
	var out bytes.Buffer
	encoder := png.Encoder{CompressionLevel: png.BestSpeed}
	_ = encoder.Encode(&out, paletted(canvas.Image().(*image.RGBA)))
	return out.Bytes()
}

// paletted makes an index image of an opaque one, of as many tones as a byte can
// name. Tones that agree in the leading five bits of each channel become the first
// of them; beyond 256 the nearest is taken. Lines and letters do not suffer, and
// it is encoded several times faster.
func paletted(m *image.RGBA) *image.Paletted {
	const unseen = -1
	var index [1 << 15]int16
	for i := range index {
		index[i] = unseen
	}
	out := image.NewPaletted(m.Rect, make(color.Palette, 0, 256))
	for i, k := 0, 0; i+3 < len(m.Pix); i, k = i+4, k+1 {
		r, g, b := m.Pix[i], m.Pix[i+1], m.Pix[i+2]
		key := int(r>>3)<<10 | int(g>>3)<<5 | int(b>>3)
		at := index[key]
		if at == unseen {
			tone := color.RGBA{r, g, b, 255}
			at = int16(len(out.Palette))
			if at < 256 {
				out.Palette = append(out.Palette, tone)
			} else {
				at = int16(out.Palette.Index(tone))
			}
			index[key] = at
		}
		out.Pix[k] = uint8(at)
	}
	return out
}

func fill(c draw.Canvas, tone color.Color, r vg.Rectangle) {
	c.SetColor(tone)
	c.Fill(r.Path())
}
