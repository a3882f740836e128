package openapi

import (
	"bytes"
	"encoding/json"
	"reflect"
	"slices"
)

// typed checks a Go value as encoding/json would write it.
func (c *check) typed(n *node, v any) bool {
	if v == nil {
		return c.null(n)
	}
	r := reflect.ValueOf(v)
	return c.value(c.plans.of(n, r.Type()), r)
}

func (c *check) null(n *node) bool {
	return n.kind == anything || c.add("type", "of the wrong type", n.wants(), "null", n.unit)
}

// value follows a plan.
func (c *check) value(p *plan, v reflect.Value) bool {
	switch p.shape {
	case unchecked:
		return true
	case floating:
		return c.number(p.node, v.Float())
	case signed:
		return c.number(p.node, float64(v.Int()))
	case unsigned:
		return c.number(p.node, float64(v.Uint()))
	case words:
		return c.text(p.node, v.String())
	case truth:
		return true
	case structure:
		return c.structure(p, v)
	case figures:
		return c.figures(p, v)
	case sequence:
		return c.sequence(p, v)
	case dictionary:
		return c.dictionary(p, v)
	case pointer, dynamic:
		if v.IsNil() {
			return c.null(p.node)
		}
		if p.shape == pointer {
			return c.value(p.elem, v.Elem())
		}
		return c.tree(p.node, v.Interface())
	case valuer:
		return c.tree(p.node, addressed(v, valuerType).(Valuer).ContractValue())
	case lister:
		return c.lister(p, addressed(v, listerType).(FieldLister))
	case marshalled:
		return c.marshalled(p, v)
	}
	return c.add("type", "of the wrong type", p.node.wants(), p.goType.String(), p.node.unit)
}

// addressed returns v as a value that implements i, by its address if the
// methods need it.
func addressed(v reflect.Value, i reflect.Type) any {
	if v.Type().Implements(i) {
		return v.Interface()
	}
	if !v.CanAddr() {
		at := reflect.New(v.Type()).Elem()
		at.Set(v)
		v = at
	}
	return v.Addr().Interface()
}

func (c *check) structure(p *plan, v reflect.Value) bool {
	members := 0
	for i := range p.fields {
		f := &p.fields[i]
		fv := v.Field(f.index[0])
		for _, below := range f.index[1:] {
			fv = fv.Field(below)
		}
		if f.omitted(fv) {
			if f.required && !c.missing(p.node, f.name) {
				return false
			}
			continue
		}
		members++
		if !c.field(p, f, fv) {
			return false
		}
	}
	for _, name := range p.absent {
		if !c.missing(p.node, name) {
			return false
		}
	}
	return c.members(p.node, members)
}

func (f *field) omitted(v reflect.Value) bool {
	if v.Kind() == reflect.Pointer {
		return (f.omitZero || f.omitEmpty) && v.IsNil()
	}
	if f.omitZero && (v.IsZero() || f.ownZero && addressed(v, zeroerType).(interface{ IsZero() bool }).IsZero()) {
		return true
	}
	if !f.omitEmpty {
		return false
	}
	switch v.Kind() {
	case reflect.Slice, reflect.Map, reflect.String, reflect.Array:
		return v.Len() == 0
	case reflect.Struct:
		return false
	}
	return v.IsZero()
}

func (c *check) field(p *plan, f *field, v reflect.Value) bool {
	c.enter(f.name)
	goOn := c.planned(p, f, v)
	c.leave()
	return goOn
}

// planned checks the value of a field by the field's plan.
func (c *check) planned(p *plan, f *field, v reflect.Value) bool {
	if f.plan == nil {
		return !p.node.closed || c.add("additionalProperties", "unknown field", p.node.nearest(f.name), "", "")
	}
	if !c.value(f.plan, v) {
		return false
	}
	if p.ends == nil || !slices.Contains(spreadEnds, f.name) {
		return true
	}
	for v.Kind() == reflect.Pointer {
		v = v.Elem()
	}
	return v.Kind() != reflect.Float64 || c.number(p.ends, v.Float())
}

func (c *check) figures(p *plan, v reflect.Value) bool {
	n := p.node
	if v.IsNil() {
		return c.null(n)
	}
	if !c.size(n, v.Len(), "entry", "entries", "Items") {
		return false
	}
	if n.maxSize >= 0 && v.Len() > n.maxSize {
		return true
	}
	items := v.Interface().([]float64)
	least, greatest := n.items.min, n.items.max
	for i, x := range items {
		if x >= least && x <= greatest && !n.items.integer {
			continue
		}
		c.enterIndex(i)
		goOn := c.number(n.items, x)
		c.leave()
		if !goOn {
			return false
		}
	}
	return true
}

func (c *check) sequence(p *plan, v reflect.Value) bool {
	if v.Kind() == reflect.Slice && v.IsNil() {
		return c.null(p.node)
	}
	if !c.size(p.node, v.Len(), "entry", "entries", "Items") {
		return false
	}
	if p.node.maxSize >= 0 && v.Len() > p.node.maxSize {
		return true
	}
	for i := range v.Len() {
		c.enterIndex(i)
		goOn := c.value(p.elem, v.Index(i))
		c.leave()
		if !goOn {
			return false
		}
	}
	return true
}

func (c *check) dictionary(p *plan, v reflect.Value) bool {
	if v.IsNil() {
		return c.null(p.node)
	}
	members := make(map[string]any, v.Len())
	for i := v.MapRange(); i.Next(); {
		members[i.Key().String()] = i.Value().Interface()
	}
	return c.object(p.node, members)
}

func (c *check) lister(p *plan, l FieldLister) bool {
	n := p.node
	if n.kind != object {
		return c.add("type", "of the wrong type", n.wants(), p.goType.String(), n.unit)
	}
	members := make(map[string]any, len(n.properties))
	for name, v := range l.ContractFields() {
		members[name] = v
	}
	return c.object(n, members)
}

// marshalled checks a value whose type writes its own JSON: slow, and right.
func (c *check) marshalled(p *plan, v reflect.Value) bool {
	b, err := json.Marshal(addressed(v, marshalerType))
	if err != nil {
		return c.add("type", "cannot be encoded", p.node.wants(), p.goType.String(), p.node.unit)
	}
	var tree any
	if err := json.NewDecoder(bytes.NewReader(b)).Decode(&tree); err != nil {
		return c.add("type", "is not encoded as JSON", p.node.wants(), p.goType.String(), p.node.unit)
	}
	return c.tree(p.node, tree)
}
