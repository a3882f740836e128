package sarif

import (
	"bytes"
	"errors"
	"io"
	"strings"
	"unicode/utf16"
	"unicode/utf8"

	"github.com/go-json-experiment/json/jsontext"
)

// Place is where a value begins in a text: line from 1, column from 1 in UTF-16
// code units, the format's default.
type Place struct{ Line, Column int }

// Places holds where the values of a JSON document stand, by pointer.
type Places map[string]Place

// Find returns the place of a pointer or, if the document does not have it (a
// rating that was not given), of the nearest thing above it.
func (p Places) Find(pointer string) (Place, bool) {
	for {
		if at, ok := p[pointer]; ok {
			return at, true
		}
		cut := strings.LastIndexByte(pointer, '/')
		if cut < 0 {
			return Place{}, false
		}
		pointer = pointer[:cut]
	}
}

// Locate finds the places of every value of a JSON text. The error is that of
// the text.
func Locate(raw []byte) (Places, error) {
	places := Places{}
	d := jsontext.NewDecoder(bytes.NewReader(raw))
	at := walker{raw: raw, line: 1, column: 1}
	for {
		kind := d.PeekKind()
		start := skip(raw, int(d.InputOffset()))
		token, err := d.ReadToken()
		if errors.Is(err, io.EOF) {
			return places, nil
		}
		if err != nil {
			return nil, err
		}
		if kind == '}' || kind == ']' {
			continue
		}
		if k, n := d.StackIndex(d.StackDepth()); k == '{' && n%2 == 1 && token.Kind() == '"' {
			continue // a name, not a value
		}
		places[string(d.StackPointer())] = at.advance(start)
	}
}

// skip returns the offset of the next token after one that ended at from.
func skip(raw []byte, from int) int {
	for from < len(raw) && bytes.IndexByte([]byte(" \t\r\n,:"), raw[from]) >= 0 {
		from++
	}
	return from
}

// walker counts lines and columns forward through a text.
type walker struct {
	raw          []byte
	at           int
	line, column int
}

func (w *walker) advance(to int) Place {
	for w.at < to {
		r, size := utf8.DecodeRune(w.raw[w.at:])
		w.at += size
		if r == '\n' {
			w.line, w.column = w.line+1, 1
		} else {
			w.column += max(1, utf16.RuneLen(r))
		}
	}
	return Place{w.line, w.column}
}
