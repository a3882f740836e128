package render

import (
	"image/color"
	"math"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// rampEnds are the tones of a map from its least to its greatest class, each
// darker than the one before, so that grey paper keeps their order.
var rampEnds = []color.RGBA{{243, 238, 214, 255}, {214, 196, 132, 255}, {150, 165, 122, 255}, {78, 124, 128, 255}, {36, 78, 116, 255}, {26, 36, 74, 255}}

// rampTone returns the tone of class i of n.
func rampTone(i, n int) color.RGBA {
	at := 0.5
	if n > 1 {
		at = float64(i) / float64(n-1)
	}
	at *= float64(len(rampEnds) - 1)
	k := min(int(at), len(rampEnds)-2)
	f := at - float64(k)
	mix := func(a, b uint8) uint8 { return uint8(math.Round(float64(a) + f*(float64(b)-float64(a)))) }
	a, b := rampEnds[k], rampEnds[k+1]
	return color.RGBA{mix(a.R, b.R), mix(a.G, b.G), mix(a.B, b.B), 255}
}

// light tells whether dark text can be read on a tone.
func light(c color.RGBA) bool {
	return 0.299*float64(c.R)+0.587*float64(c.G)+0.114*float64(c.B) > 140
}

// hatch marks a rectangle in which there is nothing to show.
func hatch(f draw.Canvas, r vg.Rectangle) {
	fill(f, faintTone, r)
	clipped := draw.Canvas{Canvas: f.Canvas, Rectangle: r}
	tall := r.Max.Y - r.Min.Y
	var path vg.Path
	for x := r.Min.X - tall; x < r.Max.X; x += px(8) {
		for _, line := range clipped.ClipLinesXY([]vg.Point{{X: x, Y: r.Min.Y}, {X: x + tall, Y: r.Max.Y}}) {
			path.Move(line[0])
			path.Line(line[1])
		}
	}
	if len(path) > 0 {
		f.SetLineStyle(stroke(axisTone, 0.8))
		f.Stroke(path)
	}
}
