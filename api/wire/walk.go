package wire

import (
	"reflect"
	"strconv"
	"strings"
	"sync"
)

// slot is the place of one optional number in a wire struct: exactly one of the
// pointers is set. Where nothing was given it holds nil.
type slot struct {
	number **Number  // may be a spread
	plain  **float64 // may not
	whole  **Integer // may not, and has no fraction
}

func (s slot) given() bool {
	return s.number != nil && *s.number != nil || s.plain != nil && *s.plain != nil || s.whole != nil && *s.whole != nil
}

// counts are whole numbers that size the stage; the registry of its fields does
// not have them.
var counts = map[string]bool{"count": true, "phase_count": true}

var (
	numberType = reflect.TypeFor[*Number]()
	plainType  = reflect.TypeFor[*float64]()
	wholeType  = reflect.TypeFor[*Integer]()
)

// walk calls visit for every number below v that a field id can name, in the
// order of the struct, with its id relative to v. With grow it creates the
// objects on the way; without, it stays within what was given.
func walk(v reflect.Value, at string, grow bool, visit func(id string, s slot)) {
	for i, name := range namesOf(v.Type(), at) {
		if name != "" {
			walkField(v.Field(i), name, grow, visit)
		}
	}
}

// namesOf returns the ids of a struct's fields below a prefix, "" for those that
// are no place of the registry. There are few prefixes, so they are joined once.
func namesOf(t reflect.Type, at string) []string {
	key := namesKey{t, at}
	if names, ok := joined.Load(key); ok {
		return names.([]string)
	}
	names := make([]string, t.NumField())
	for i := range names {
		name, _, _ := strings.Cut(t.Field(i).Tag.Get("json"), ",")
		if !counts[name] {
			names[i] = at + name
		}
	}
	joined.Store(key, names)
	return names
}

type namesKey struct {
	goType reflect.Type
	at     string
}

var joined sync.Map // namesKey -> []string

// below returns the prefix of what lies below an id, joined once.
func below(at string) string {
	if prefix, ok := prefixes.Load(at); ok {
		return prefix.(string)
	}
	prefixes.Store(at, at+"/")
	return at + "/"
}

// entry returns the id of an entry of a list, joined once.
func entry(at string, i int) string {
	key := entryKey{at, i}
	if id, ok := entries.Load(key); ok {
		return id.(string)
	}
	id := at + "/" + strconv.Itoa(i)
	entries.Store(key, id)
	return id
}

type entryKey struct {
	at string
	i  int
}

var prefixes, entries sync.Map

func walkField(f reflect.Value, at string, grow bool, visit func(id string, s slot)) {
	switch {
	case f.Type() == numberType:
		visit(at, slot{number: f.Addr().Interface().(**Number)})
	case f.Type() == plainType:
		visit(at, slot{plain: f.Addr().Interface().(**float64)})
	case f.Type() == wholeType:
		visit(at, slot{whole: f.Addr().Interface().(**Integer)})
	case f.Kind() == reflect.Pointer && f.Type().Elem().Kind() == reflect.Struct:
		if f.IsNil() && grow {
			f.Set(reflect.New(f.Type().Elem()))
		}
		if !f.IsNil() {
			walk(f.Elem(), below(at), grow, visit)
		}
	case f.Kind() == reflect.Slice && f.Type().Elem().Kind() == reflect.Pointer:
		for i := range f.Len() {
			walkField(f.Index(i), entry(at, i), grow, visit)
		}
	}
}
