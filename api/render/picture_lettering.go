package render

import (
	"strings"
	"sync"

	"golang.org/x/image/font/sfnt"
	"golang.org/x/image/math/fixed"
	"gonum.org/v1/plot/font"
	"gonum.org/v1/plot/text"
	"gonum.org/v1/plot/vg"

	xfont "golang.org/x/image/font"
)

// lettering sets plain text and remembers how wide letters are: a picture measures
// many texts several times before it knows where they go.
type lettering struct{ text.Plain }

// Box implements text.Handler.
func (l lettering) Box(s string, f font.Font) (width, height, depth vg.Length) {
	m := widthsOf(l.Fonts.Lookup(f, f.Size))
	scale := f.Size / vg.Length(m.em)
	return vg.Length(m.of(s)) * scale, vg.Length(m.ascent) * scale, vg.Length(m.descent) * scale
}

// Draw implements text.Handler for text of one line along the horizontal.
func (l lettering) Draw(c vg.Canvas, s string, style text.Style, at vg.Point) {
	s = strings.TrimRight(s, "\n")
	if s == "" {
		return
	}
	c.SetColor(style.Color)
	width, height, depth := l.Box(s, style.Font)
	at.X += vg.Length(style.XAlign) * width
	at.Y += style.Font.Size + (height+depth)*vg.Length(style.YAlign) - height
	c.FillString(l.Fonts.Lookup(style.Font, style.Font.Size), at, s)
}

// knownLetters are those whose widths are kept: of what pictures write, all but
// what users name things.
const knownLetters = 128

// widths of a face, in units of the face.
type widths struct {
	face            *sfnt.Font
	em              fixed.Int26_6
	ascent, descent fixed.Int26_6
	index           [knownLetters]sfnt.GlyphIndex
	advance         [knownLetters]fixed.Int26_6
	kern            [knownLetters][knownLetters]int16
}

var faceWidths sync.Map // of *sfnt.Font to *widths

func widthsOf(f font.Face) *widths {
	if known, is := faceWidths.Load(f.Face); is {
		return known.(*widths)
	}
	m := &widths{face: f.Face, em: fixed.Int26_6(f.Face.UnitsPerEm())}
	var work sfnt.Buffer
	if metrics, err := f.Face.Metrics(&work, m.em, xfont.HintingNone); err == nil {
		m.ascent, m.descent = metrics.Ascent, metrics.Descent
	}
	for r := range m.index {
		m.index[r], m.advance[r] = m.measured(&work, rune(r))
	}
	for a := range m.kern {
		for b := range m.kern[a] {
			m.kern[a][b] = int16(m.between(&work, m.index[a], m.index[b]))
		}
	}
	known, _ := faceWidths.LoadOrStore(f.Face, m)
	return known.(*widths)
}

// measured returns a letter's place in the face and its width; none for a letter
// that the face lacks.
func (m *widths) measured(work *sfnt.Buffer, r rune) (sfnt.GlyphIndex, fixed.Int26_6) {
	i, err := m.face.GlyphIndex(work, r)
	if err != nil {
		return 0, 0
	}
	width, err := m.face.GlyphAdvance(work, i, m.em, xfont.HintingNone)
	if err != nil {
		return i, 0
	}
	return i, width
}

func (m *widths) between(work *sfnt.Buffer, a, b sfnt.GlyphIndex) fixed.Int26_6 {
	k, err := m.face.Kern(work, a, b, m.em, xfont.HintingNone)
	if err != nil { // most faces have none for most pairs
		return 0
	}
	return k
}

// of returns the width of a text.
func (m *widths) of(s string) (width fixed.Int26_6) {
	p := pen{widths: m}
	for _, r := range s {
		gap, advance := p.step(r)
		width += gap + advance
	}
	return width
}

// pen walks along a text.
type pen struct {
	*widths
	begun bool
	last  rune
	index sfnt.GlyphIndex
	work  *sfnt.Buffer // for what is not kept
}

// step passes a letter: how much closer it stands to the one before, and its width.
func (p *pen) step(r rune) (gap, advance fixed.Int26_6) {
	if p.work == nil && r >= knownLetters {
		p.work = new(sfnt.Buffer)
	}
	var i sfnt.GlyphIndex
	if r < knownLetters {
		i, advance = p.widths.index[r], p.advance[r]
	} else {
		i, advance = p.measured(p.work, r)
	}
	switch {
	case !p.begun:
	case r < knownLetters && p.last < knownLetters:
		gap = fixed.Int26_6(p.kern[p.last][r])
	default:
		gap = p.between(p.work, p.index, i)
	}
	p.begun, p.last, p.index = true, r, i
	return gap, advance
}
