package openapi

import (
	"fmt"
	"math"
	"regexp"
	"strings"
)

// compiler turns the schemas of the contract into nodes, each component once.
type compiler struct {
	document   map[string]any
	components map[string]*node
}

const componentPrefix = "#/components/schemas/"

// schema compiles one schema. It panics on what the contract may not use: the
// contract is part of the program and tests load it.
func (k *compiler) schema(v any) *node {
	s := v.(map[string]any)
	if ref, ok := s["$ref"].(string); ok {
		return k.component(ref)
	}
	n := new(node)
	k.fill(n, s)
	return n
}

// component compiles a component that a reference names. A component that
// contains itself finds its own node here.
func (k *compiler) component(ref string) *node {
	if n := k.components[ref]; n != nil {
		return n
	}
	s, ok := resolve(k.document, ref).(map[string]any)
	if !ok {
		panic("openapi: nothing at " + ref)
	}
	n := new(node)
	k.components[ref] = n
	k.fill(n, s)
	return n
}

// resolve follows a local reference such as #/components/schemas/Stage.
func resolve(document map[string]any, ref string) any {
	at := any(document)
	for name := range strings.SplitSeq(strings.TrimPrefix(ref, "#/"), "/") {
		o, _ := at.(map[string]any)
		at = o[name]
	}
	return at
}

var keywords = map[string]bool{
	"type": true, "format": true, "description": true, "enum": true, "pattern": true, "items": true, "properties": true, "required": true,
	"additionalProperties": true, "oneOf": true, "minimum": true, "maximum": true, "minLength": true, "maxLength": true, "minItems": true,
	"maxItems": true, "minProperties": true, "maxProperties": true, "x-unit": true, "x-unit-of": true, "x-spread": true, "x-expression": true,
}

func (k *compiler) fill(n *node, s map[string]any) {
	for word := range s {
		if !keywords[word] {
			panic(fmt.Sprintf("openapi: the contract uses the schema keyword %q, which the compiled check does not know", word))
		}
	}
	n.min, n.max, n.maxSize = math.Inf(-1), math.Inf(1), -1
	n.unit, _ = s["x-unit"].(string)
	n.spread, _ = s["x-spread"].(bool)
	if branches, ok := s["oneOf"].([]any); ok {
		k.union(n, branches)
		return
	}
	switch s["type"] {
	case "object":
		n.kind = object
		n.size(s, "Properties")
		k.members(n, s)
	case "array":
		n.kind = array
		n.size(s, "Items")
		if items, ok := s["items"]; ok {
			n.items = k.schema(items)
		}
	case "string":
		n.kind = text
		n.size(s, "Length")
		n.words(s)
	case "number", "integer":
		n.kind = number
		n.integer = s["type"] == "integer"
		if v, ok := s["minimum"].(float64); ok {
			n.min = v
		}
		if v, ok := s["maximum"].(float64); ok {
			n.max = v
		}
	case "boolean":
		n.kind = boolean
	case nil:
	default:
		panic(fmt.Sprintf("openapi: the contract uses the type %v", s["type"]))
	}
}

func (n *node) size(s map[string]any, keyword string) {
	if v, ok := s["min"+keyword].(float64); ok {
		n.minSize = int(v)
	}
	if v, ok := s["max"+keyword].(float64); ok {
		n.maxSize = int(v)
	}
}

func (n *node) words(s map[string]any) {
	if p, ok := s["pattern"].(string); ok {
		n.pattern = regexp.MustCompile(p)
	}
	values, ok := s["enum"].([]any)
	if !ok {
		return
	}
	n.enumSet = make(map[string]struct{}, len(values))
	for _, v := range values {
		n.enum = append(n.enum, v.(string))
		n.enumSet[v.(string)] = struct{}{}
	}
}

func (k *compiler) members(n *node, s map[string]any) {
	switch extra := s["additionalProperties"].(type) {
	case bool:
		n.closed = !extra
	case map[string]any:
		n.extra = k.schema(extra)
	}
	properties, _ := s["properties"].(map[string]any)
	n.properties = make(map[string]*node, len(properties))
	n.order = sortedNames(properties)
	for name, p := range properties {
		n.properties[name] = k.schema(p)
	}
	required, _ := s["required"].([]any)
	for _, name := range required {
		if n.properties[name.(string)] == nil {
			panic(fmt.Sprintf("openapi: the contract requires %q, which is no property", name))
		}
		n.required = append(n.required, name.(string))
	}
}

// union compiles alternatives that differ in their JSON type.
func (k *compiler) union(n *node, branches []any) {
	n.kind = union
	accepts := make([]string, 0, len(branches))
	for _, b := range branches {
		branch := k.schema(b)
		if n.branches[branch.kind] != nil || branch.kind == anything {
			panic("openapi: the contract offers alternatives of one JSON type")
		}
		n.branches[branch.kind] = branch
		what := kindNames[branch.kind]
		if branch.kind == object {
			what += " with " + sentence(branch.order, "and")
			if n.spread {
				what = "a spread such as {typ, tol} or {min, typ, max}"
			}
		}
		accepts = append(accepts, what)
	}
	n.accepts = sentence(accepts, "or")
}
