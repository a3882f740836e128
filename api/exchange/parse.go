package exchange

import (
	"errors"
	"fmt"
	"strconv"

	v2 "github.com/go-json-experiment/json"
	"github.com/go-json-experiment/json/jsontext"

	"railproof/api/wire"
)

// maxDepth bounds the nesting of a request. The deepest document of the contract
// has less than half of it.
const maxDepth = 32

// parse reads exactly one JSON value, strictly: no duplicate names, no text after
// it, no invalid UTF-8, no number beyond float64.
func parse(body []byte) (any, *Problem) {
	if tree, ok := quick(body); ok {
		return tree, nil
	}
	var tree any
	if err := v2.Unmarshal(body, &tree); err != nil {
		return nil, unreadable(err)
	}
	if at, deep := tooDeep(tree, 0); deep {
		return nil, malformed(wire.Fault{Pointer: bounded(at), Keyword: "depth", Detail: "nested too deeply", Limit: fmt.Sprintf("at most %d levels", maxDepth)})
	}
	return tree, nil
}

// unreadable describes why the text is no JSON document that can be taken.
func unreadable(err error) *Problem {
	f := wire.Fault{Keyword: "syntax"}
	if syntax, ok := errors.AsType[*jsontext.SyntacticError](err); ok {
		f.Pointer = bounded(string(syntax.JSONPointer))
		f.Detail = fmt.Sprintf("%s at byte %d", syntax.Err.Error(), syntax.ByteOffset)
		if errors.Is(err, jsontext.ErrDuplicateName) {
			f.Keyword, f.Detail = "duplicate-key", "the name stands twice in its object"
		}
	} else if meaning, ok := errors.AsType[*v2.SemanticError](err); ok {
		f.Pointer = bounded(string(meaning.JSONPointer))
		f.Keyword, f.Detail, f.Received = "value", "the value cannot be taken", shorten(string(meaning.JSONValue), 80)
		if errors.Is(err, strconv.ErrRange) {
			f.Keyword, f.Detail, f.Limit = "number-range", "the number is too large for double precision", "a magnitude up to 1.797e308"
		}
	}
	if f.Detail == "" {
		f.Detail = "not one complete JSON document"
	}
	return malformed(f)
}

// tooDeep returns the pointer of a value nested beyond maxDepth.
func tooDeep(v any, depth int) (string, bool) {
	switch v := v.(type) {
	case map[string]any:
		if depth >= maxDepth {
			return "", true
		}
		for name, member := range v {
			if at, deep := tooDeep(member, depth+1); deep {
				return "/" + wire.EscapeToken(name) + at, true
			}
		}
	case []any:
		if depth >= maxDepth {
			return "", true
		}
		for i, entry := range v {
			if at, deep := tooDeep(entry, depth+1); deep {
				return "/" + strconv.Itoa(i) + at, true
			}
		}
	}
	return "", false
}

// maxPointer bounds a pointer in an answer; a longer one is cut back to the
// nearest parent that fits.
const maxPointer = 256

func bounded(pointer string) string {
	for len(pointer) > maxPointer {
		i := len(pointer) - 1
		for i > 0 && pointer[i] != '/' {
			i--
		}
		pointer = pointer[:i]
	}
	return pointer
}

func shorten(s string, n int) string {
	if len(s) <= n {
		return s
	}
	for n > 0 && s[n]&0xC0 == 0x80 {
		n--
	}
	return s[:n] + "…"
}
