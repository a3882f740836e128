package service

import (
	"crypto/sha256"
	"encoding/hex"
	"math"
	"slices"
	"strconv"
	"strings"
	"unicode/utf16"
	"unicode/utf8"
)

// ResultID names the answer to a request: "res_" and the SHA-256, in hexadecimal,
// of the RFC 8785 form of {"engine": …, "operation": …, "request": …}. The request
// is a tree as a strict JSON parser yields it; how its text was spaced, ordered or
// how its numbers were written does not matter.
func ResultID(operation string, e Engine, request any) string {
	document := map[string]any{
		"engine":    map[string]any{"name": e.Name, "version": e.Version, "contract_version": e.ContractVersion, "platform": e.Platform},
		"operation": operation,
		"request":   request,
	}
	sum := sha256.Sum256(AppendCanonical(make([]byte, 0, 8<<10), document))
	return "res_" + hex.EncodeToString(sum[:])
}

// AppendCanonical appends the RFC 8785 form of a tree of map[string]any, []any,
// float64, string, bool and nil. Strings are valid UTF-8 and numbers finite, as
// every parsed document has them; anything else is the caller's bug.
func AppendCanonical(b []byte, v any) []byte {
	c := canonical{b, make([]member, 0, 64)}
	c.value(v)
	return c.text
}

// canonical writes the RFC 8785 form.
type canonical struct {
	text []byte
	open []member // of all objects that are being written
}

type member struct {
	name  string
	value any
}

func (c *canonical) value(v any) {
	switch v := v.(type) {
	case nil:
		c.text = append(c.text, "null"...)
	case bool:
		c.text = strconv.AppendBool(c.text, v)
	case float64:
		c.text = appendNumber(c.text, v)
	case string:
		c.text = appendString(c.text, v)
	case []any:
		c.text = append(c.text, '[')
		for i, entry := range v {
			if i > 0 {
				c.text = append(c.text, ',')
			}
			c.value(entry)
		}
		c.text = append(c.text, ']')
	case map[string]any:
		c.object(v)
	default:
		panic("service: no JSON value")
	}
}

// object writes the members in the order of their names' UTF-16 code units.
func (c *canonical) object(members map[string]any) {
	from, plain := len(c.open), true
	for name, value := range members {
		c.open = append(c.open, member{name, value})
		plain = plain && isASCII(name)
	}
	list := c.open[from:]
	if plain { // bytes and code units sort alike
		slices.SortFunc(list, func(x, y member) int { return strings.Compare(x.name, y.name) })
	} else {
		slices.SortFunc(list, func(x, y member) int {
			return slices.Compare(utf16.Encode([]rune(x.name)), utf16.Encode([]rune(y.name)))
		})
	}
	c.text = append(c.text, '{')
	for i := range list {
		if i > 0 {
			c.text = append(c.text, ',')
		}
		c.text = append(appendString(c.text, list[i].name), ':')
		c.value(list[i].value)
	}
	c.text = append(c.text, '}')
	c.open = c.open[:from]
}

func isASCII(s string) bool {
	for i := range len(s) {
		if s[i] >= utf8.RuneSelf {
			return false
		}
	}
	return true
}

// appendNumber writes a number as ECMAScript does: the shortest digits that read
// back, with an exponent from 1e21 and below 1e-6.
func appendNumber(b []byte, v float64) []byte {
	size := math.Abs(v)
	switch {
	case math.IsNaN(v) || math.IsInf(v, 0):
		panic("service: a number that JSON does not have")
	case v == 0:
		return append(b, '0')
	case size >= 1e-6 && size < 1e21:
		return strconv.AppendFloat(b, v, 'f', -1, 64)
	}
	b = strconv.AppendFloat(b, v, 'e', -1, 64)
	if n := len(b); b[n-2] == '0' && (b[n-3] == '-' || b[n-3] == '+') { // e-09 is written e-9
		b[n-2] = b[n-1]
		b = b[:n-1]
	}
	return b
}

const hexadecimal = "0123456789abcdef"

// appendString writes a string with the fewest escapes.
func appendString(b []byte, s string) []byte {
	b = append(b, '"')
	if isPlain(s) {
		return append(append(b, s...), '"')
	}
	for i := range len(s) {
		switch c := s[i]; {
		case c == '"' || c == '\\':
			b = append(b, '\\', c)
		case c >= ' ':
			b = append(b, c)
		case c == '\b':
			b = append(b, '\\', 'b')
		case c == '\t':
			b = append(b, '\\', 't')
		case c == '\n':
			b = append(b, '\\', 'n')
		case c == '\f':
			b = append(b, '\\', 'f')
		case c == '\r':
			b = append(b, '\\', 'r')
		default:
			b = append(b, '\\', 'u', '0', '0', hexadecimal[c>>4], hexadecimal[c&15])
		}
	}
	return append(b, '"')
}

// isPlain reports whether a string is written as it is.
func isPlain(s string) bool {
	for i := range len(s) {
		if c := s[i]; c < ' ' || c == '"' || c == '\\' {
			return false
		}
	}
	return true
}
