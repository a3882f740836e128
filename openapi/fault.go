package openapi

import (
	"encoding/json"
	"strconv"
	"strings"
	"unicode/utf8"
)

// MaxFaults bounds the list of faults in one verdict.
const MaxFaults = 50

// maxReceived bounds what is repeated of a faulty value, in bytes.
const maxReceived = 80

// Fault is one place where a document breaks its schema.
type Fault struct {
	Pointer  string // RFC 6901, from the document's root
	Keyword  string // the schema keyword that was broken: "maximum", "required", ...
	Detail   string // for people
	Limit    string // what is accepted
	Received string // what was given, cut to a sensible length
	Unit     string // UCUM code of Limit and Received, where they are quantities
}

// segment is one step of the place that is being looked at.
type segment struct {
	name  string
	index int // -1: name holds the step
}

// check walks a value. With collect off it stops at the first fault without
// remembering it; with collect on it gathers up to MaxFaults.
type check struct {
	collect bool
	plans   *plans // of Go values among the tree; nil: there are none
	failed  bool
	at      []segment // the place that is being looked at, kept with collect on
	faults  []Fault
}

func (c *check) enter(name string) { c.step(segment{name, -1}) }
func (c *check) enterIndex(i int)  { c.step(segment{index: i}) }

func (c *check) step(s segment) {
	if c.collect {
		c.at = append(c.at, s)
	}
}

func (c *check) leave() {
	if c.collect {
		c.at = c.at[:len(c.at)-1]
	}
}

// pointer writes the place that is being looked at.
func (c *check) pointer() string {
	var b strings.Builder
	for _, s := range c.at {
		b.WriteByte('/')
		if s.index >= 0 {
			b.WriteString(strconv.Itoa(s.index))
			continue
		}
		for i := 0; i < len(s.name); i++ {
			switch s.name[i] {
			case '~':
				b.WriteString("~0")
			case '/':
				b.WriteString("~1")
			default:
				b.WriteByte(s.name[i])
			}
		}
	}
	return b.String()
}

// fail notes a fault and reports whether to go on.
func (c *check) fail() bool {
	c.failed = true
	return c.collect && len(c.faults) < MaxFaults
}

func (c *check) add(keyword, detail, limit, received, unit string) bool {
	if !c.fail() {
		return false
	}
	c.faults = append(c.faults, Fault{Pointer: c.pointer(), Keyword: keyword, Detail: detail, Limit: limit, Received: received, Unit: unit})
	return len(c.faults) < MaxFaults
}

// received writes a value as it stood in the document, cut to a sensible length.
func received(v any) string {
	switch v := v.(type) {
	case nil:
		return "null"
	case map[string]any:
		return "an object of " + count(len(v), "member")
	case []any:
		return "an array of " + count(len(v), "entry", "entries")
	case float64:
		return figure(v)
	case string:
		return cut(strconv.Quote(cut(v, maxReceived)), maxReceived)
	case bool:
		return strconv.FormatBool(v)
	}
	b, err := json.Marshal(v)
	if err != nil {
		return ""
	}
	return cut(string(b), maxReceived)
}

func count(n int, singular string, plural ...string) string {
	if n == 1 {
		return "1 " + singular
	}
	if len(plural) == 0 {
		return strconv.Itoa(n) + " " + singular + "s"
	}
	return strconv.Itoa(n) + " " + plural[0]
}

// figure writes a number with the digits that identify it.
func figure(v float64) string { return strconv.FormatFloat(v, 'g', -1, 64) }

// cut shortens s to at most n bytes without cutting a character.
func cut(s string, n int) string {
	if len(s) <= n {
		return s
	}
	n -= len("…")
	for n > 0 && !utf8.RuneStart(s[n]) {
		n--
	}
	return s[:n] + "…"
}

// sentence lists names as people do: "a, b or c".
func sentence(names []string, last string) string {
	switch len(names) {
	case 0:
		return ""
	case 1:
		return names[0]
	}
	return strings.Join(names[:len(names)-1], ", ") + " " + last + " " + names[len(names)-1]
}
