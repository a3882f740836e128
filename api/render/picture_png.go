package render

import (
	"bytes"
	"image/png"
	"sync"
)

// PNG writes the picture with two dots for a pixel, as fine screens and paper
// want it.
func (p *Picture) PNG(width int) []byte {
	width = bound(width)
	dpi := 192.
	if width > 1200 {
		dpi = 96
	}
	w, h := p.size(width)
	on := newPainting(w, h, dpi)
	on.paintAll(p.record(w, h))
	var out bytes.Buffer
	// a buffer takes every write; an error cannot come up
	_ = pngEncoder.Encode(&out, on.canvas.image())
	on.release()
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
