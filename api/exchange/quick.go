package exchange

import (
	"strconv"
	"unicode/utf8"
)

// quick reads one JSON document of plain text: no escapes in strings, no nesting
// beyond maxDepth. It takes nothing that the strict parser refuses and gives the
// same tree; whatever it does not take, faulty or merely unusual, it leaves to the
// strict parser, which also says what is wrong.
//
// The strings of the tree share one copy of the text.
func quick(body []byte) (tree any, ok bool) {
	r := reader{text: string(body), members: make([]member, 0, 64), entries: make([]any, 0, 32)}
	tree, ok = r.value(0)
	r.space()
	return tree, ok && r.at == len(r.text)
}

type reader struct {
	text    string
	at      int
	members []member // of all objects that are open
	entries []any    // of all arrays that are open
}

type member struct {
	name  string
	value any
}

func (r *reader) space() {
	for r.at < len(r.text) {
		switch r.text[r.at] {
		case ' ', '\t', '\n', '\r':
			r.at++
		default:
			return
		}
	}
}

// take skips white space and then c, if it is there.
func (r *reader) take(c byte) bool {
	r.space()
	if r.at < len(r.text) && r.text[r.at] == c {
		r.at++
		return true
	}
	return false
}

func (r *reader) value(depth int) (any, bool) {
	r.space()
	if r.at >= len(r.text) || depth > maxDepth {
		return nil, false
	}
	switch r.text[r.at] {
	case '{':
		r.at++
		return r.object(depth)
	case '[':
		r.at++
		return r.array(depth)
	case '"':
		r.at++
		return r.words()
	case 't':
		return true, r.literal("true")
	case 'f':
		return false, r.literal("false")
	case 'n':
		return nil, r.literal("null")
	}
	return r.number()
}

func (r *reader) literal(word string) bool {
	end := r.at + len(word)
	if end > len(r.text) || r.text[r.at:end] != word {
		return false
	}
	r.at = end
	return true
}

func (r *reader) object(depth int) (any, bool) {
	open := len(r.members)
	for closed := r.take('}'); !closed; closed = r.take('}') {
		if len(r.members) > open && !r.take(',') || !r.take('"') {
			return nil, false
		}
		name, ok := r.words()
		if !ok || !r.take(':') {
			return nil, false
		}
		v, ok := r.value(depth + 1)
		if !ok {
			return nil, false
		}
		r.members = append(r.members, member{name, v})
	}
	own := r.members[open:]
	r.members = r.members[:open]
	object := make(map[string]any, len(own))
	for _, m := range own {
		object[m.name] = m.value
	}
	return object, len(object) == len(own) && depth < maxDepth
}

func (r *reader) array(depth int) (any, bool) {
	open := len(r.entries)
	for closed := r.take(']'); !closed; closed = r.take(']') {
		if len(r.entries) > open && !r.take(',') {
			return nil, false
		}
		v, ok := r.value(depth + 1)
		if !ok {
			return nil, false
		}
		r.entries = append(r.entries, v)
	}
	own := append([]any{}, r.entries[open:]...)
	r.entries = r.entries[:open]
	return own, depth < maxDepth
}

// words reads a string behind its first quotation mark.
func (r *reader) words() (string, bool) {
	plain := true
	for start := r.at; r.at < len(r.text); r.at++ {
		switch c := r.text[r.at]; {
		case c == '"':
			s := r.text[start:r.at]
			r.at++
			return s, plain || utf8.ValidString(s)
		case c < ' ' || c == '\\':
			return "", false
		case c >= utf8.RuneSelf:
			plain = false
		}
	}
	return "", false
}

// number reads what the grammar of JSON takes and double precision holds.
func (r *reader) number() (any, bool) {
	start := r.at
	if r.text[r.at] == '-' {
		r.at++
	}
	if leading := r.at; r.digits() == 0 || r.text[leading] == '0' && r.at > leading+1 {
		return nil, false
	}
	if r.at < len(r.text) && r.text[r.at] == '.' {
		r.at++
		if r.digits() == 0 {
			return nil, false
		}
	}
	if r.at < len(r.text) && r.text[r.at]|0x20 == 'e' {
		r.at++
		if r.at < len(r.text) && (r.text[r.at] == '+' || r.text[r.at] == '-') {
			r.at++
		}
		if r.digits() == 0 {
			return nil, false
		}
	}
	v, err := strconv.ParseFloat(r.text[start:r.at], 64)
	return v, err == nil
}

// digits skips decimal digits and returns their number.
func (r *reader) digits() int {
	from := r.at
	for r.at < len(r.text) && r.text[r.at] >= '0' && r.text[r.at] <= '9' {
		r.at++
	}
	return r.at - from
}
