package render

import (
	"image"
	"math"
	"slices"
	"sync"

	"golang.org/x/image/math/fixed"
	"gonum.org/v1/plot/font"

	xfont "golang.org/x/image/font"
)

// faces hold the dots of letters: a picture sets a thousand, of which few differ.
// One picture has them at a time, and leaves them to the next.
type faces map[sizedFont]*face

type sizedFont struct {
	font font.Font
	dpi  float64
}

var spareFaces = sync.Pool{New: func() any { return faces{} }}

// face is a font in one size.
type face struct {
	outlines xfont.Face
	widths   *widths
	unit     float64 // [dots] of a unit of the font
	letters  map[placedLetter]*mask
}

func (f faces) face(of font.Font, dpi float64) *face {
	key := sizedFont{of, dpi}
	if f[key] == nil {
		found := fonts.Lookup(of, of.Size)
		m := widthsOf(found)
		f[key] = &face{found.FontFace(dpi), m, of.Size.Dots(dpi) / float64(m.em), map[placedLetter]*mask{}}
	}
	return f[key]
}

// placedLetter is a letter that begins some quarters of a dot after a whole one.
type placedLetter struct {
	letter   rune
	quarters int
}

// mostLetters bounds what is kept of a face; pictures without users' names have fewer.
const mostLetters = 2000

// letter returns the dots of a letter that begins at x, and the whole dot there.
func (f *face) letter(r rune, x float64) (m *mask, whole int) {
	quarters := int(math.Round(4 * x))
	whole = quarters >> 2
	key := placedLetter{r, quarters & 3}
	m = f.letters[key]
	if m == nil {
		if len(f.letters) >= mostLetters {
			clear(f.letters)
		}
		m = &mask{}
		box, dots, _, _, ok := f.outlines.Glyph(fixed.Point26_6{X: fixed.Int26_6(key.quarters << 4)}, r)
		if ok {
			*m = mask{box.Min.X, box.Min.Y, box.Dx(), box.Dy(), slices.Clone(dots.(*image.Alpha).Pix)}
		}
		f.letters[key] = m
	}
	return m, whole
}
