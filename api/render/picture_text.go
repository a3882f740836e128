package render

import (
	"strings"
	"unicode"

	"gonum.org/v1/plot/text"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// plain leaves out what a picture cannot hold: control characters and what XML
// forbids. Minus signs are written as such.
func plain(s string) string {
	return withMinus(strings.Map(func(r rune) rune {
		switch {
		case r == '\n' || r == '\t':
			return ' '
		case unicode.IsControl(r), r == 0xFFFE, r == 0xFFFF, r == unicode.ReplacementChar:
			return -1
		}
		return r
	}, s))
}

// withMinus writes minus signs as such.
func withMinus(s string) string {
	if !strings.Contains(s, "-") {
		return s
	}
	return minus.ReplaceAllString(s, "$1−$2")
}

// lineStep is the height of a line of text.
func lineStep(ink text.Style) vg.Length { return ink.Font.Size * 1.35 }

func textHeight(ink text.Style, lines []string) vg.Length {
	return vg.Length(len(lines)) * lineStep(ink)
}

// clip shortens a text to a width, with an ellipsis.
func clip(ink text.Style, s string, width vg.Length) string {
	s = plain(s)
	if ink.Width(s) <= width {
		return s
	}
	r := []rune(s)
	for lo, hi := 0, len(r); ; {
		if hi-lo <= 1 {
			return strings.TrimRight(string(r[:lo]), " ") + "…"
		}
		if mid := (lo + hi) / 2; ink.Width(string(r[:mid])+"…") <= width {
			lo = mid
		} else {
			hi = mid
		}
	}
}

// wrap breaks a text into at most so many lines; the last one is clipped.
func wrap(ink text.Style, s string, width vg.Length, most int) []string {
	words := strings.Fields(plain(s))
	var lines []string
	for len(words) > 0 {
		if len(lines) == most-1 {
			return append(lines, clip(ink, strings.Join(words, " "), width))
		}
		n := 1
		line := words[0]
		for n < len(words) && ink.Width(line+" "+words[n]) <= width {
			line += " " + words[n]
			n++
		}
		lines = append(lines, clip(ink, line, width))
		words = words[n:]
	}
	return lines
}

// writeLines writes lines downwards from y and returns where they end.
func writeLines(c draw.Canvas, ink text.Style, lines []string, y vg.Length) vg.Length {
	for _, line := range lines {
		write(c, ink, c.Min.X, y-lineStep(ink)/2, draw.XLeft, line)
		y -= lineStep(ink)
	}
	return y
}

// lift brings the middle of capitals and figures to where the library puts the middle
// of the whole height of letters, in sizes of the font.
const lift = 0.1

// write puts a line of text, centred vertically on y.
func write(c draw.Canvas, ink text.Style, x, y vg.Length, align text.XAlignment, s string) {
	if s == "" {
		return
	}
	ink.XAlign, ink.YAlign = align, draw.YCenter
	c.FillText(ink, vg.Point{X: x, Y: y + lift*ink.Font.Size}, withMinus(s))
}
