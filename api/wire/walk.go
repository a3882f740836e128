package wire

import (
	"reflect"
	"strconv"
	"strings"
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
	t := v.Type()
	for i := range t.NumField() {
		name, _, _ := strings.Cut(t.Field(i).Tag.Get("json"), ",")
		if !counts[name] {
			walkField(v.Field(i), at+name, grow, visit)
		}
	}
}

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
			walk(f.Elem(), at+"/", grow, visit)
		}
	case f.Kind() == reflect.Slice && f.Type().Elem().Kind() == reflect.Pointer:
		for i := range f.Len() {
			walkField(f.Index(i), at+"/"+strconv.Itoa(i), grow, visit)
		}
	}
}
