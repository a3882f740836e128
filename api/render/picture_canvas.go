package render

import (
	"encoding/binary"
	"image"
	"image/color"
	"math"
	"sync"
)

// canvas is an image of as many tones as a byte can name, painted as such: it takes a
// quarter of the memory of full tones and is encoded several times faster. Tones that
// agree in the leading five bits of each channel become the first of them; beyond 256
// the nearest is taken. Lines and letters do not suffer.
type canvas struct {
	wide, tall int
	dots       []byte
	palette    color.Palette
	named      [1 << 15]int16 // by the leading bits: one more than the name, or 0
	tones      map[color.NRGBA]*tone
}

// tone is what is painted with.
type tone struct {
	full  color.NRGBA
	plain uint8 // its name where nothing shines through
	// mixed names what comes of covering so much of a dot of each tone. 0 is not yet
	// known: it is the paper's name too, which is quickly found again.
	mixed *[degrees][256]uint8
}

// degrees are told apart between a dot not covered at all and wholly.
const degrees = 64

// newCanvas returns a canvas of one tone, whose name is 0.
func newCanvas(wide, tall int, ground color.RGBA) *canvas {
	c := &canvas{wide: wide, tall: tall, dots: bytesOf(wide * tall), palette: make(color.Palette, 0, 256), tones: map[color.NRGBA]*tone{}}
	fillBytes(c.dots, c.name(ground))
	return c
}

func (c *canvas) release() { keep(c.dots) }

func (c *canvas) image() *image.Paletted {
	return &image.Paletted{Pix: c.dots, Stride: c.wide, Rect: image.Rect(0, 0, c.wide, c.tall), Palette: c.palette}
}

// name finds the name of a tone.
func (c *canvas) name(full color.RGBA) uint8 {
	at := &c.named[int(full.R>>3)<<10|int(full.G>>3)<<5|int(full.B>>3)]
	if *at == 0 {
		if len(c.palette) < cap(c.palette) {
			c.palette = append(c.palette, full)
			*at = int16(len(c.palette))
		} else {
			*at = int16(c.palette.Index(full)) + 1
		}
	}
	return uint8(*at - 1)
}

// tone returns what paints with a colour.
func (c *canvas) tone(full color.NRGBA) *tone {
	t, known := c.tones[full]
	if !known {
		t = &tone{full: full}
		if full.A == math.MaxUint8 {
			t.plain = c.name(color.RGBA(full))
		}
		c.tones[full] = t
	}
	return t
}

// mask tells how far each dot of an area is covered, row by row.
type mask struct {
	left, top, wide, tall int // [dots]
	covered               []uint8
}

// cover paints the dots of a row from one column up to another.
func (c *canvas) cover(y, from, to int, t *tone) {
	from, to = max(from, 0), min(to, c.wide)
	if y < 0 || y >= c.tall || from >= to {
		return
	}
	row := c.dots[y*c.wide+from : y*c.wide+to]
	if t.full.A == math.MaxUint8 {
		fillBytes(row, t.plain)
		return
	}
	for i := range row {
		c.mix(&row[i], t, math.MaxUint8)
	}
}

// stamp paints what a mask covers, moved so far.
func (c *canvas) stamp(m *mask, right, down int, t *tone) {
	hides := uint8(math.MaxUint8) // what is below
	if t.full.A < math.MaxUint8 {
		hides = 0 // never
	}
	from, to := max(0, -m.left-right), min(m.wide, c.wide-m.left-right)
	for row := range m.tall {
		y := m.top + down + row
		if y < 0 || y >= c.tall || from >= to {
			continue
		}
		covered := m.covered[row*m.wide+from : row*m.wide+to]
		dots := c.dots[y*c.wide+m.left+right+from:][:len(covered)]
		for k := 0; k < len(covered); k++ {
			switch covered[k] {
			case 0:
				if k+8 <= len(covered) && binary.LittleEndian.Uint64(covered[k:]) == 0 {
					k += 7
				}
			case hides:
				dots[k] = t.plain
			default:
				c.mix(&dots[k], t, covered[k])
			}
		}
	}
}

// mix paints a dot that is covered so far.
func (c *canvas) mix(dot *byte, t *tone, covered uint8) {
	const whole = math.MaxUint8 * math.MaxUint8
	degree := (uint32(covered)*uint32(t.full.A)*degrees + whole/2) / whole
	switch degree {
	case 0:
		return
	case degrees:
		*dot = t.plain
		return
	}
	if t.mixed == nil {
		t.mixed = new([degrees][256]uint8)
	}
	mixed := &t.mixed[degree][*dot]
	if *mixed == 0 {
		below := c.palette[*dot].(color.RGBA)
		channel := func(over, under uint8) uint8 {
			return uint8((uint32(over)*degree + uint32(under)*(degrees-degree) + degrees/2) / degrees)
		}
		*mixed = c.name(color.RGBA{channel(t.full.R, below.R), channel(t.full.G, below.G), channel(t.full.B, below.B), math.MaxUint8})
	}
	*dot = *mixed
}

// fillBytes sets all bytes of b.
func fillBytes(b []byte, v byte) {
	const few = 16
	for i := range min(few, len(b)) {
		b[i] = v
	}
	for n := few; n < len(b); n *= 2 {
		copy(b[n:], b[:n])
	}
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
