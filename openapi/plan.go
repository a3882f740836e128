package openapi

import (
	"encoding/json"
	"fmt"
	"iter"
	"reflect"
	"slices"
	"strings"
	"sync"
)

// A Valuer is a Go type whose JSON form is that of another value: a number that
// may be a spread, say. ContractValue returns that value.
type Valuer interface{ ContractValue() any }

// A FieldLister is a Go type whose JSON form is an object with members that are
// not struct fields. ContractFields yields the members that will be written.
type FieldLister interface {
	ContractFields() iter.Seq2[string, any]
}

// shape is what a plan does with a Go value.
type shape uint8

const (
	unfit      shape = iota // no value of the type satisfies the schema
	unchecked               // every value does
	pointer                 // null, or what it points to
	dynamic                 // an interface: decided by the value
	valuer                  // what ContractValue returns
	lister                  // what ContractFields yields
	marshalled              // parsed again from its JSON
	structure
	dictionary // a map with string keys
	sequence   // a slice or an array
	figures    // a slice of float64
	floating
	signed
	unsigned
	words
	truth
)

// plan says how to check values of one Go type against one schema.
type plan struct {
	shape  shape
	node   *node
	fields []field // of a structure
	absent []string
	elem   *plan // of a pointer, dictionary or sequence
	ends   *node // of the number branch, where the structure is a spread
	goType reflect.Type
}

// field is a struct field that encoding/json writes.
type field struct {
	name      string
	index     []int
	omitEmpty bool
	omitZero  bool
	ownZero   bool // its type says what zero is
	required  bool
	plan      *plan // nil: an unknown member of an open object
}

// plans makes each plan once.
type plans struct {
	mu   sync.Mutex
	made sync.Map // planKey -> *plan
}

type planKey struct {
	node   *node
	ends   *node
	goType reflect.Type
}

// of returns the plan for values of the type under the schema.
func (ps *plans) of(n *node, t reflect.Type) *plan {
	if p, ok := ps.made.Load(planKey{n, nil, t}); ok {
		return p.(*plan)
	}
	ps.mu.Lock()
	defer ps.mu.Unlock()
	fresh := map[planKey]*plan{}
	p := ps.make(fresh, n, nil, t)
	for key, made := range fresh { // only now: a plan under work is not complete
		ps.made.Store(key, made)
	}
	return p
}

var (
	valuerType    = reflect.TypeFor[Valuer]()
	listerType    = reflect.TypeFor[FieldLister]()
	marshalerType = reflect.TypeFor[json.Marshaler]()
	zeroerType    = reflect.TypeFor[interface{ IsZero() bool }]()
)

func (ps *plans) make(fresh map[planKey]*plan, n, ends *node, t reflect.Type) *plan {
	key := planKey{n, ends, t}
	if p, ok := ps.made.Load(key); ok {
		return p.(*plan)
	}
	if p := fresh[key]; p != nil {
		return p
	}
	p := &plan{node: n, ends: ends, goType: t}
	fresh[key] = p
	switch {
	case n.kind == anything:
		p.shape = unchecked
	case t.Kind() == reflect.Pointer:
		p.shape, p.elem = pointer, ps.make(fresh, n, ends, t.Elem())
	case t.Kind() == reflect.Interface:
		p.shape = dynamic
	case implements(t, valuerType):
		p.shape = valuer
	case implements(t, listerType):
		p.shape = lister
	case implements(t, marshalerType):
		p.shape = marshalled
	case n.kind == union:
		ps.branch(fresh, p, t)
	default:
		ps.fill(fresh, p, t)
	}
	return p
}

func implements(t, i reflect.Type) bool {
	return t.Implements(i) || reflect.PointerTo(t).Implements(i)
}

// branch replaces a union by the branch that the type can satisfy.
func (ps *plans) branch(fresh map[planKey]*plan, p *plan, t reflect.Type) {
	b := p.node.branches[kindOfType(t)]
	if b == nil {
		return
	}
	var ends *node
	if p.node.spread && b.kind == object {
		ends = p.node.branches[number]
	}
	*p = *ps.make(fresh, b, ends, t)
}

func kindOfType(t reflect.Type) kind {
	switch t.Kind() {
	case reflect.Struct, reflect.Map:
		return object
	case reflect.Slice, reflect.Array:
		return array
	case reflect.String:
		return text
	case reflect.Bool:
		return boolean
	case reflect.Float32, reflect.Float64, reflect.Int, reflect.Int8, reflect.Int16, reflect.Int32, reflect.Int64,
		reflect.Uint, reflect.Uint8, reflect.Uint16, reflect.Uint32, reflect.Uint64:
		return number
	}
	return anything
}

func (ps *plans) fill(fresh map[planKey]*plan, p *plan, t reflect.Type) {
	if kindOfType(t) != p.node.kind {
		return
	}
	switch t.Kind() {
	case reflect.Struct:
		p.shape = structure
		ps.structure(fresh, p, t)
	case reflect.Map:
		if t.Key().Kind() == reflect.String {
			p.shape = dictionary
		}
	case reflect.Slice, reflect.Array:
		p.shape = sequence
		if p.node.items == nil {
			p.elem = &plan{shape: unchecked}
		} else if t == reflect.TypeFor[[]float64]() && p.node.items.kind == number {
			p.shape = figures
		} else {
			p.elem = ps.make(fresh, p.node.items, nil, t.Elem())
		}
	case reflect.String:
		p.shape = words
	case reflect.Bool:
		p.shape = truth
	case reflect.Float32, reflect.Float64:
		p.shape = floating
	case reflect.Int, reflect.Int8, reflect.Int16, reflect.Int32, reflect.Int64:
		p.shape = signed
	default:
		p.shape = unsigned
	}
}

func (ps *plans) structure(fresh map[planKey]*plan, p *plan, t reflect.Type) {
	p.fields = jsonFields(t, nil)
	for i := range p.fields {
		f := &p.fields[i]
		f.required = slices.Contains(p.node.required, f.name)
		if n := p.node.properties[f.name]; n != nil {
			f.plan = ps.make(fresh, n, nil, t.FieldByIndex(f.index).Type)
		} else if p.node.extra != nil {
			f.plan = ps.make(fresh, p.node.extra, nil, t.FieldByIndex(f.index).Type)
		}
	}
	for _, name := range p.node.required {
		if !slices.ContainsFunc(p.fields, func(f field) bool { return f.name == name }) {
			p.absent = append(p.absent, name)
		}
	}
}

// jsonFields lists the fields that encoding/json writes, those of embedded
// structs in their place. It panics on embedded pointers and interfaces, which
// no wire type has.
func jsonFields(t reflect.Type, at []int) []field {
	var fields []field
	for i := range t.NumField() {
		f := t.Field(i)
		index := append(slices.Clone(at), i)
		name, options, _ := strings.Cut(f.Tag.Get("json"), ",")
		switch {
		case name == "-" && options == "":
		case f.Anonymous && name == "":
			if f.Type.Kind() != reflect.Struct {
				panic(fmt.Sprintf("openapi: %v embeds %v", t, f.Type))
			}
			for _, promoted := range jsonFields(f.Type, index) {
				if !slices.ContainsFunc(fields, func(g field) bool { return g.name == promoted.name }) {
					fields = append(fields, promoted)
				}
			}
		case f.IsExported():
			if name == "" {
				name = f.Name
			}
			fields = append(fields, field{name: name, index: index, omitEmpty: hasOption(options, "omitempty"), omitZero: hasOption(options, "omitzero"), ownZero: implements(f.Type, zeroerType)})
		}
	}
	return fields
}

func hasOption(options, want string) bool {
	for o := range strings.SplitSeq(options, ",") {
		if o == want {
			return true
		}
	}
	return false
}
