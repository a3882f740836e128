package render

import (
	"image/color"
	"math"
	"testing"

	"github.com/stretchr/testify/require"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/recorder"
)

// covered adds up a mask [dots].
func covered(m *mask) (sum float64) {
	for _, c := range m.covered {
		sum += float64(c) / math.MaxUint8
	}
	return sum
}

func TestLinesCoverTheirArea(t *testing.T) {
	p := newPainting(300, 300, 72)
	defer p.release()
	for _, width := range []float64{1.6, 2, 3.6} {
		for _, degrees := range []float64{0, 3, 30, 45, 77, 90, 133, 270} {
			sin, cos := math.Sincos(degrees * math.Pi / 180)
			along := func(d float64) position { return position{150.3 + d*cos, 149.8 + d*sin} }
			draw := func(line []position, dashes ...float64) float64 {
				m := p.maskOf(line, width/2+1)
				(&brush{m, width / 2}).line(line, dashes)
				return covered(m)
			}
			whole, close := 100*width, 0.06 // a dot's middle stands for all of it
			if math.Mod(degrees, 90) == 0 {
				close = 0.005
			}
			require.InEpsilon(t, whole, draw([]position{along(0), along(100)}), close, "%v dots wide at %v°", width, degrees)
			require.InEpsilon(t, whole, draw([]position{along(0), along(37), along(37.2), along(100)}), close, "in pieces")
			require.InEpsilon(t, whole, draw([]position{along(100), along(0), along(100)}), close+0.03, "there and back covers once, but for the round turn")
			require.InEpsilon(t, 60*width, draw([]position{along(0), along(31), along(100)}, 12, 8), close+0.01, "dashes of 12 in 20")
		}
	}
	far := p.maskOf([]position{{-50, 10}, {400, 10}}, 3)
	require.Equal(t, []int{0, 7, 300, 6}, []int{far.left, far.top, far.wide, far.tall}, "no more than the canvas")
	(&brush{far, 1}).line([]position{{-50, 10}, {400, 10}}, nil)
	require.InDelta(t, 600, covered(far), 1e-9)
}

func TestCanvasHasTheTonesThatWereAskedFor(t *testing.T) {
	var rec recorder.Canvas
	square := func(i int) vg.Path {
		at := vg.Point{X: vg.Length(i%30) * 10, Y: vg.Length(i/30) * 10}
		return vg.Rectangle{Min: at, Max: at.Add(vg.Point{X: 10, Y: 10})}.Path()
	}
	asked := func(i int) color.RGBA { return color.RGBA{uint8(32*(i%8) + 3), uint8(32*(i/8) + 5), 77, 255} }
	for i := range mostAsked - 1 {
		rec.SetColor(asked(i))
		rec.Fill(square(i))
	}
	rec.SetColor(color.NRGBA{0, 0, 0, 128})
	rec.Fill(square(60))
	for i := range 800 { // more than there are names
		rec.SetColor(color.RGBA{uint8(i * 37), uint8(i * 91), uint8(i * 53), 255})
		rec.Fill(square(70 + i))
	}
	p := newPainting(300, 300, 72)
	p.paintAll(rec.Actions)
	m := p.canvas.image()
	tone := func(i int) color.RGBA { return m.At(10*(i%30)+5, 299-10*(i/30)-5).(color.RGBA) }
	for i := range 60 {
		require.Equal(t, asked(i), tone(i))
	}
	require.Equal(t, color.RGBA{66, 115, 39, 255}, tone(60), "half of what was below")
	require.Len(t, m.Palette, 256)
	for i := range 800 {
		got, want := tone(70+i), color.RGBA{uint8(i * 37), uint8(i * 91), uint8(i * 53), 255}
		for _, c := range [][2]uint8{{got.R, want.R}, {got.G, want.G}, {got.B, want.B}} {
			require.InDelta(t, float64(c[1]), float64(c[0]), 48, "%v as %v", want, got)
		}
	}
	p.release()
}
