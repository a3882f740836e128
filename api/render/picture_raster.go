package render

import (
	"image"
	"image/color"
	"image/draw"
	"slices"
	"sync"

	"git.sr.ht/~sbinet/gg"
	"golang.org/x/image/math/fixed"
	"gonum.org/v1/plot/font"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/vgimg"

	xfont "golang.org/x/image/font"
)

// raster is an image to draw on. It takes its memory from the picture before and
// sets letters upright straight from their outlines, where the library would run
// each through a general affine map.
type raster struct {
	*vgimg.Canvas
	dots  *image.RGBA
	tone  color.Color
	tones []color.RGBA // opaque ones that were used, each once
	faces map[font.Font]xfont.Face
}

// newRaster returns paper of the given size and dots per inch.
func newRaster(w, h vg.Length, dpi int) *raster {
	wide, tall := int(w.Dots(float64(dpi))+0.5), int(h.Dots(float64(dpi))+0.5)
	s := &raster{dots: &image.RGBA{Pix: bytesOf(4 * wide * tall), Stride: 4 * wide, Rect: image.Rect(0, 0, wide, tall)}, faces: map[font.Font]xfont.Face{}}
	context := gg.NewContextForRGBA(s.dots)
	context.SetLineCapButt()
	context.InvertY()
	s.Canvas = vgimg.NewWith(vgimg.UseImageWithContext(s.dots, context), vgimg.UseDPI(dpi))
	draw.Draw(s.dots, s.dots.Rect, image.NewUniform(paper), image.Point{}, draw.Src)
	return s
}

// release gives back what the raster and its index image are made of.
func (s *raster) release(m *image.Paletted) {
	keep(s.dots.Pix)
	keep(m.Pix)
}

// mostTones leaves most of the names of an index image to what lies between tones.
const mostTones = 64

// SetColor implements vg.Canvas.
func (s *raster) SetColor(tone color.Color) {
	s.tone = tone
	if t := color.RGBAModel.Convert(tone).(color.RGBA); t.A == 255 && len(s.tones) < mostTones && !slices.Contains(s.tones, t) {
		s.tones = append(s.tones, t)
	}
	s.Canvas.SetColor(tone)
}

// FillString implements vg.Canvas for text along the horizontal.
func (s *raster) FillString(f font.Face, at vg.Point, text string) {
	face, known := s.faces[f.Font]
	if !known {
		face = f.FontFace(s.DPI())
		s.faces[f.Font] = face
	}
	x, y := at.X.Dots(s.DPI()), float64(s.dots.Rect.Dy())-at.Y.Dots(s.DPI())
	pen := xfont.Drawer{Dst: s.dots, Src: image.NewUniform(s.tone), Face: face, Dot: fixed.Point26_6{X: fixed.Int26_6(64*x + 0.5), Y: fixed.Int26_6(64*y + 0.5)}}
	pen.DrawString(text)
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
