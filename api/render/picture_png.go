package render

import (
	"bytes"
	"encoding/binary"
	"image"
	"image/color"
	"image/png"
	"sync"
)

// PNG writes the picture with two dots for a pixel, as fine screens and paper
// want it.
func (p *Picture) PNG(width int) []byte {
	width = bound(width)
	dots := 192
	if width > 1200 {
		dots = 96
	}
	w, h := p.size(width)
	r := newRaster(w, h, dots)
	for _, a := range p.record(w, h) {
		r.write(a)
	}
	m := r.paletted()
	var out bytes.Buffer
	// a buffer takes every write; an error cannot come up
	_ = pngEncoder.Encode(&out, m)
	r.release(m)
	return out.Bytes()
}

var pngEncoder = png.Encoder{CompressionLevel: png.BestSpeed, BufferPool: new(pngBuffers)}

// pngBuffers keeps what an encoder works with for the next picture.
type pngBuffers struct{ sync.Pool }

func (b *pngBuffers) Get() *png.EncoderBuffer {
	kept, _ := b.Pool.Get().(*png.EncoderBuffer)
	return kept
}

func (b *pngBuffers) Put(e *png.EncoderBuffer) { b.Pool.Put(e) }

// paletted makes an index image of the opaque raster, of as many tones as a byte
// can name. Tones that agree in the leading five bits of each channel become the
// first of them, which is the one that was drawn with; beyond 256 the nearest is
// taken. Lines and letters do not suffer, and it is encoded several times faster.
func (r *raster) paletted() *image.Paletted {
	const unseen = -1
	var index [1 << 15]int16
	for i := range index {
		index[i] = unseen
	}
	m := r.dots
	wide := m.Rect.Dx()
	out := &image.Paletted{Pix: bytesOf(len(m.Pix) / 4), Stride: wide, Rect: m.Rect, Palette: make(color.Palette, 0, 256)}
	name := func(dot uint32) uint8 {
		tone := color.RGBA{uint8(dot), uint8(dot >> 8), uint8(dot >> 16), 255}
		at := &index[int(tone.R>>3)<<10|int(tone.G>>3)<<5|int(tone.B>>3)]
		if *at == unseen {
			if *at = int16(len(out.Palette)); *at < 256 {
				out.Palette = append(out.Palette, tone)
			} else {
				*at = int16(out.Palette.Index(tone))
			}
		}
		return uint8(*at)
	}
	for _, tone := range r.tones { // what was asked for stays exact
		name(uint32(tone.R) | uint32(tone.G)<<8 | uint32(tone.B)<<16)
	}
	var before []byte // the row above: most rows are like it
	for y := range m.Rect.Dy() {
		from, to := m.Pix[y*m.Stride:][:4*wide], out.Pix[y*wide:][:wide]
		if bytes.Equal(from, before) {
			copy(to, out.Pix[(y-1)*wide:])
			continue
		}
		last := binary.LittleEndian.Uint32(from)
		named := name(last)
		for x := range to {
			if dot := binary.LittleEndian.Uint32(from[4*x:]); dot != last {
				last, named = dot, name(dot)
			}
			to[x] = named
		}
		before = from
	}
	return out
}
