package wire

import (
	"fmt"
	"math"
	"reflect"
	"strings"
	"sync"
)

// FromTree fills the struct that into points to from a JSON document's tree of
// map[string]any, []any, float64, string, bool and nil. A name without a field
// and a value of another type are errors; both are faults that the contract's
// check of the tree has found before.
func FromTree(tree, into any) error {
	return fromTree(tree, reflect.ValueOf(into).Elem())
}

// treeReader is a type that reads its own form.
type treeReader interface{ readTree(v any) error }

var treeReaderType = reflect.TypeFor[treeReader]()

func fromTree(v any, to reflect.Value) error {
	if to.Kind() == reflect.Pointer {
		to.Set(reflect.New(to.Type().Elem()))
		to = to.Elem()
	}
	if reflect.PointerTo(to.Type()).Implements(treeReaderType) {
		return to.Addr().Interface().(treeReader).readTree(v)
	}
	switch v := v.(type) {
	case float64:
		if to.Kind() == reflect.Float64 {
			to.SetFloat(v)
			return nil
		}
	case string:
		if to.Kind() == reflect.String {
			to.SetString(v)
			return nil
		}
	case bool:
		if to.Kind() == reflect.Bool {
			to.SetBool(v)
			return nil
		}
	case []any:
		if to.Kind() == reflect.Slice {
			return listFromTree(v, to)
		}
	case map[string]any:
		if to.Kind() == reflect.Struct {
			return structFromTree(v, to)
		}
	}
	return fmt.Errorf("wire: a %T does not fit", v)
}

func listFromTree(v []any, to reflect.Value) error {
	if numbers, ok := to.Addr().Interface().(*[]float64); ok {
		*numbers = make([]float64, len(v))
		for i := range v {
			if (*numbers)[i], ok = v[i].(float64); !ok {
				return fmt.Errorf("wire: a %T among numbers", v[i])
			}
		}
		return nil
	}
	to.Set(reflect.MakeSlice(to.Type(), len(v), len(v)))
	for i := range v {
		if err := fromTree(v[i], to.Index(i)); err != nil {
			return err
		}
	}
	return nil
}

func structFromTree(v map[string]any, to reflect.Value) error {
	fields := fieldsOf(to.Type())
	for name, member := range v {
		i, known := fields[name]
		if !known {
			return fmt.Errorf("wire: no field %q", name)
		}
		if err := fromTree(member, to.Field(i)); err != nil {
			return err
		}
	}
	return nil
}

var structFields sync.Map // reflect.Type -> map[string]int

func fieldsOf(t reflect.Type) map[string]int {
	if m, ok := structFields.Load(t); ok {
		return m.(map[string]int)
	}
	m := make(map[string]int, t.NumField())
	for i := range t.NumField() {
		name, _, _ := strings.Cut(t.Field(i).Tag.Get("json"), ",")
		m[name] = i
	}
	structFields.Store(t, m)
	return m
}

func (n *Number) readTree(v any) error {
	switch v := v.(type) {
	case float64:
		n.Value = v
		return nil
	case map[string]any:
		n.Spread = new(Spread)
		return structFromTree(v, reflect.ValueOf(n.Spread).Elem())
	}
	return fmt.Errorf("wire: a %T for a number or spread", v)
}

func (n *Integer) readTree(v any) error {
	f, ok := v.(float64)
	if !ok || f != math.Trunc(f) || math.Abs(f) > 1<<53 {
		return fmt.Errorf("wire: %v for a whole number", v)
	}
	*n = Integer(f)
	return nil
}

func (f *Frequency) readTree(v any) error {
	switch v := v.(type) {
	case float64:
		f.Fixed = v
		return nil
	case map[string]any:
		f.Sweep = new(FrequencyRange)
		return structFromTree(v, reflect.ValueOf(f.Sweep).Elem())
	}
	return fmt.Errorf("wire: a %T for a frequency or range", v)
}
