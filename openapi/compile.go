package openapi

import (
	"fmt"
	"math"
	"regexp"

	"github.com/getkin/kin-openapi/openapi3"
)

// compiler turns the schemas of the contract into nodes, each component once.
type compiler struct {
	components map[string]*node
}

const componentPrefix = "#/components/schemas/"

// schema compiles one schema, a component by its reference. A component that
// contains itself finds its own node here. It panics on what the contract may
// not use: the contract is part of the program and tests load it.
func (k *compiler) schema(ref *openapi3.SchemaRef) *node {
	if ref.Ref == "" {
		n := new(node)
		k.fill(n, ref.Value)
		return n
	}
	if n := k.components[ref.Ref]; n != nil {
		return n
	}
	n := new(node)
	k.components[ref.Ref] = n
	k.fill(n, ref.Value)
	return n
}

// refuse panics on the keywords that the compiled check does not know.
func refuse(s *openapi3.Schema) {
	for word, used := range map[string]bool{
		"allOf": len(s.AllOf) > 0, "anyOf": len(s.AnyOf) > 0, "not": s.Not != nil, "default": s.Default != nil,
		"uniqueItems": s.UniqueItems, "exclusiveMinimum": s.ExclusiveMin.IsSet(), "exclusiveMaximum": s.ExclusiveMax.IsSet(),
		"nullable": s.Nullable, "readOnly": s.ReadOnly, "writeOnly": s.WriteOnly, "multipleOf": s.MultipleOf != nil,
		"discriminator": s.Discriminator != nil, "const": s.Const != nil,
	} {
		if used {
			panic(fmt.Sprintf("openapi: the contract uses the schema keyword %q, which the compiled check does not know", word))
		}
	}
}

func (k *compiler) fill(n *node, s *openapi3.Schema) {
	refuse(s)
	n.min, n.max, n.maxSize = math.Inf(-1), math.Inf(1), -1
	n.unit, _ = s.Extensions["x-unit"].(string)
	n.spread, _ = s.Extensions["x-spread"].(bool)
	n.below, _ = s.Extensions["x-below"].(string)
	switch {
	case len(s.OneOf) > 0:
		k.union(n, s.OneOf)
	case s.Type == nil:
	case s.Type.Is("object"):
		n.kind = object
		n.size(s.MinProps, s.MaxProps)
		k.members(n, s)
	case s.Type.Is("array"):
		n.kind = array
		n.size(s.MinItems, s.MaxItems)
		if s.Items != nil {
			n.items = k.schema(s.Items)
		}
	case s.Type.Is("string"):
		n.kind = text
		n.size(s.MinLength, s.MaxLength)
		n.words(s)
	case s.Type.Is("number"), s.Type.Is("integer"):
		n.kind = number
		n.integer = s.Type.Is("integer")
		if s.Min != nil {
			n.min = *s.Min
		}
		if s.Max != nil {
			n.max = *s.Max
		}
	case s.Type.Is("boolean"):
		n.kind = boolean
	default:
		panic(fmt.Sprintf("openapi: the contract uses the type %v", s.Type.Slice()))
	}
}

func (n *node) size(least uint64, most *uint64) {
	n.minSize = int(least)
	if most != nil {
		n.maxSize = int(*most)
	}
}

func (n *node) words(s *openapi3.Schema) {
	if s.Pattern != "" {
		n.pattern = regexp.MustCompile(s.Pattern)
	}
	if len(s.Enum) == 0 {
		return
	}
	n.enumSet = make(map[string]struct{}, len(s.Enum))
	for _, v := range s.Enum {
		n.enum = append(n.enum, v.(string))
		n.enumSet[v.(string)] = struct{}{}
	}
}

func (k *compiler) members(n *node, s *openapi3.Schema) {
	if extra := s.AdditionalProperties; extra.Schema != nil {
		n.extra = k.schema(extra.Schema)
	} else if extra.Has != nil {
		n.closed = !*extra.Has
	}
	n.properties = make(map[string]*node, len(s.Properties))
	n.order = sortedNames(s.Properties)
	for name, p := range s.Properties {
		n.properties[name] = k.schema(p)
	}
	for _, name := range s.Required {
		if n.properties[name] == nil {
			panic(fmt.Sprintf("openapi: the contract requires %q, which is no property", name))
		}
		n.required = append(n.required, name)
	}
}

// union compiles alternatives that differ in their JSON type.
func (k *compiler) union(n *node, branches openapi3.SchemaRefs) {
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
