package openapi

import (
	"fmt"
	"maps"
	"reflect"
	"slices"
)

// CompareType returns how a Go type and a component schema of the contract
// disagree, one line for each place: a property without a field, a field that is
// no property, a required property that the type may leave out, an optional one
// that it may write as null, a field of another JSON type. Types with their own
// JSON form are taken at their word. It is for tests, which hold every wire type
// to its schema.
func (c *Contract) CompareType(component string, t reflect.Type) []string {
	p := c.plans.of(c.component(component), t)
	var differences []string
	compare(p, component, map[*plan]bool{}, func(at, format string, a ...any) {
		differences = append(differences, at+": "+fmt.Sprintf(format, a...))
	})
	return differences
}

func compare(p *plan, at string, seen map[*plan]bool, tell func(at, format string, a ...any)) {
	if p == nil || seen[p] {
		return
	}
	seen[p] = true
	switch p.shape {
	case unfit:
		tell(at, "%v where the contract has %s", p.goType, p.node.wants())
	case marshalled:
		tell(at, "%v has a JSON form that the check must parse again: let it be a Valuer or a FieldLister", p.goType)
	case floating:
		if p.node.integer {
			tell(at, "%v where the contract has %s", p.goType, p.node.wants())
		}
	case pointer, sequence:
		compare(p.elem, at, seen, tell)
	case structure:
		compareFields(p, at, seen, tell)
	}
}

func compareFields(p *plan, at string, seen map[*plan]bool, tell func(at, format string, a ...any)) {
	missing := maps.Clone(p.node.properties)
	for i := range p.fields {
		f := &p.fields[i]
		here := at + "." + f.name
		delete(missing, f.name)
		optional := f.omitEmpty || f.omitZero
		switch {
		case f.plan == nil:
			tell(here, "a field that is no property")
		case f.required && optional:
			tell(here, "required, but left out when empty")
		case !f.required && !optional && f.plan.shape == pointer:
			tell(here, "optional, but written as null when absent")
		}
		compare(f.plan, here, seen, tell)
	}
	for _, name := range slices.Sorted(maps.Keys(missing)) {
		tell(at+"."+name, "a property without a field")
	}
}
