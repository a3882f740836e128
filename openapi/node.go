package openapi

import (
	"maps"
	"math"
	"regexp"
	"slices"
	"strings"
	"unicode/utf8"
)

// kind is the type that a schema asks for.
type kind uint8

const (
	anything kind = iota
	object
	array
	text
	number
	boolean
	union // one branch for each of several JSON types
)

var kindNames = [...]string{"anything", "an object", "an array", "a string", "a number", "true or false", ""}

// node is a compiled schema.
type node struct {
	kind kind
	unit string // UCUM code of a number

	integer  bool
	min, max float64 // of a number; infinite where open
	below    string  // why a number below min has no meaning; "" where nothing is said

	minSize, maxSize int // of a string, an array or an object; maxSize -1: open
	pattern          *regexp.Regexp
	enum             []string
	enumSet          map[string]struct{}

	items *node // of an array; nil: anything

	properties map[string]*node
	order      []string // names of the properties, as the contract lists them
	required   []string
	closed     bool
	extra      *node // of members that are not properties; nil: anything

	branches [union]*node // of a union, by kind
	accepts  string       // what a union takes, in words
	spread   bool         // a union of a number and a value with its tolerance
}

// tree checks a parsed JSON value and reports whether to go on.
func (c *check) tree(n *node, v any) bool {
	switch n.kind {
	case anything:
		return true
	case union:
		return c.union(n, v)
	}
	switch v := v.(type) {
	case map[string]any:
		if n.kind == object {
			return c.object(n, v)
		}
	case []any:
		if n.kind == array {
			return c.array(n, v)
		}
	case string:
		if n.kind == text {
			return c.text(n, v)
		}
	case float64:
		if n.kind == number {
			return c.number(n, v)
		}
	case bool:
		if n.kind == boolean {
			return true
		}
	}
	if c.plans != nil && kindOf(v) == anything {
		return c.typed(n, v)
	}
	return c.add("type", "of the wrong type", n.wants(), received(v), n.unit)
}

// union checks v against the branch of its type, so that a fault speaks of what
// was meant, not of every alternative.
func (c *check) union(n *node, v any) bool {
	branch := n.branches[kindOf(v)]
	if branch == nil && c.plans != nil && kindOf(v) == anything {
		return c.typed(n, v)
	}
	if branch == nil {
		return c.add("type", "of the wrong type", n.accepts, received(v), n.unit)
	}
	if !c.tree(branch, v) {
		return false
	}
	if o, ok := v.(map[string]any); ok && n.spread {
		return c.ends(n.branches[number], o)
	}
	return true
}

// ends holds the values of a spread to the bounds of the field it stands in.
func (c *check) ends(n *node, spread map[string]any) bool {
	for _, name := range spreadEnds {
		v, ok := spread[name].(float64)
		if !ok {
			continue
		}
		c.enter(name)
		goOn := c.number(n, v)
		c.leave()
		if !goOn {
			return false
		}
	}
	return true
}

var spreadEnds = []string{"min", "typ", "max"}

func kindOf(v any) kind {
	switch v.(type) {
	case map[string]any:
		return object
	case []any:
		return array
	case string:
		return text
	case float64:
		return number
	case bool:
		return boolean
	}
	return anything
}

func (c *check) object(n *node, o map[string]any) bool {
	if !c.members(n, len(o)) {
		return false
	}
	if n.maxSize >= 0 && len(o) > n.maxSize {
		return true
	}
	for _, name := range n.required {
		if _, ok := o[name]; !ok && !c.missing(n, name) {
			return false
		}
	}
	if !c.collect {
		for name, v := range o {
			if !c.member(n, name, v) {
				return false
			}
		}
		return true
	}
	for _, name := range sortedNames(o) {
		if !c.member(n, name, o[name]) {
			return false
		}
	}
	return true
}

func (c *check) missing(n *node, name string) bool {
	c.enter(name)
	defer c.leave()
	p := n.properties[name]
	return c.add("required", "missing", p.wants(), "", p.unit)
}

func (c *check) member(n *node, name string, v any) bool {
	c.enter(name)
	goOn := c.named(n, name, v)
	c.leave()
	return goOn
}

// named checks the value of a member by the schema of its name.
func (c *check) named(n *node, name string, v any) bool {
	if p := n.properties[name]; p != nil {
		return c.tree(p, v)
	}
	if n.closed {
		return c.add("additionalProperties", "unknown field", n.nearest(name), received(v), "")
	}
	return n.extra == nil || c.tree(n.extra, v)
}

func (c *check) array(n *node, a []any) bool {
	if !c.size(n, len(a), "entry", "entries", "Items") {
		return false
	}
	if n.items == nil || n.maxSize >= 0 && len(a) > n.maxSize {
		return true
	}
	for i, v := range a {
		c.enterIndex(i)
		goOn := c.tree(n.items, v)
		c.leave()
		if !goOn {
			return false
		}
	}
	return true
}

// members checks how many members an object has.
func (c *check) members(n *node, size int) bool {
	if n.closed && n.minSize == 1 && n.maxSize == 1 && size != 1 {
		keyword := "minProperties"
		if size > 1 {
			keyword = "maxProperties"
		}
		return c.add(keyword, "exactly one member is needed", "exactly one of "+sentence(n.order, "or"), count(size, "member"), "")
	}
	return c.size(n, size, "member", "members", "Properties")
}

// size checks the number of entries, members or characters.
func (c *check) size(n *node, size int, singular, plural, keyword string) bool {
	switch {
	case size < n.minSize:
		return c.add("min"+keyword, "too few "+plural, "at least "+count(n.minSize, singular, plural), count(size, singular, plural), "")
	case n.maxSize >= 0 && size > n.maxSize:
		return c.add("max"+keyword, "too many "+plural, "at most "+count(n.maxSize, singular, plural), count(size, singular, plural), "")
	}
	return true
}

func (c *check) text(n *node, s string) bool {
	if n.enumSet != nil {
		if _, ok := n.enumSet[s]; !ok {
			return c.add("enum", "not one of the values that are accepted", sentence(n.enum, "or"), received(s), "")
		}
		return true
	}
	if n.maxSize >= 0 && len(s) > n.maxSize || n.minSize > 0 {
		if size := utf8.RuneCountInString(s); size < n.minSize {
			return c.add("minLength", "too short", "at least "+count(n.minSize, "character"), received(s), "")
		} else if n.maxSize >= 0 && size > n.maxSize {
			return c.add("maxLength", "too long", "at most "+count(n.maxSize, "character"), received(s), "")
		}
	}
	if n.pattern != nil && !n.pattern.MatchString(s) {
		return c.add("pattern", "not in the form that is accepted", "text that matches "+n.pattern.String(), received(s), "")
	}
	return true
}

func (c *check) number(n *node, v float64) bool {
	switch {
	case !(v >= n.min):
		return c.add("minimum", strings.TrimSuffix("below what is accepted: "+n.below, ": "), "at least "+figure(n.min), figure(v), n.unit)
	case !(v <= n.max):
		return c.add("maximum", "above what is accepted", "at most "+figure(n.max), figure(v), n.unit)
	case n.integer && v != math.Trunc(v):
		return c.add("type", "not a whole number", "a whole number", figure(v), n.unit)
	}
	return true
}

// wants says in a few words what the schema takes.
func (n *node) wants() string {
	switch {
	case n.kind == union:
		return n.accepts
	case n.enum != nil:
		return sentence(n.enum, "or")
	case n.integer:
		return "a whole number"
	}
	return kindNames[n.kind]
}

func sortedNames[V any](o map[string]V) []string { return slices.Sorted(maps.Keys(o)) }
