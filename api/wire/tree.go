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
	to := reflect.ValueOf(into).Elem()
	return shapeOf(to.Type()).fill(to, tree)
}

// treeReader is a type that reads its own form.
type treeReader interface{ readTree(v any) error }

var treeReaderType = reflect.TypeFor[treeReader]()

// shape is what has to be known of a type to fill it, found out once.
type shape struct {
	pointedAt *shape // of a pointer
	reads     bool   // the type reads its own form
	kind      reflect.Kind
	numbers   bool             // []float64
	entry     *shape           // of a slice
	fields    map[string]place // of a struct
}

type place struct {
	index []int // of the field, or of the one embedded in it
	shape *shape
}

var shapes sync.Map // reflect.Type -> *shape

func shapeOf(t reflect.Type) *shape {
	if s, ok := shapes.Load(t); ok {
		return s.(*shape)
	}
	s := newShape(t)
	shapes.Store(t, s)
	return s
}

func newShape(t reflect.Type) *shape {
	if t.Kind() == reflect.Pointer {
		return &shape{pointedAt: shapeOf(t.Elem())}
	}
	s := &shape{kind: t.Kind(), reads: reflect.PointerTo(t).Implements(treeReaderType)}
	switch {
	case s.reads:
	case s.kind == reflect.Slice:
		s.numbers = t == reflect.TypeFor[[]float64]()
		s.entry = shapeOf(t.Elem())
	case s.kind == reflect.Struct:
		s.fields = make(map[string]place, t.NumField())
		for _, f := range reflect.VisibleFields(t) {
			if f.IsExported() && !f.Anonymous {
				name, _, _ := strings.Cut(f.Tag.Get("json"), ",")
				s.fields[name] = place{f.Index, shapeOf(f.Type)}
			}
		}
	}
	return s
}

func (s *shape) fill(to reflect.Value, v any) error {
	if s.pointedAt != nil {
		to.Set(reflect.New(to.Type().Elem()))
		return s.pointedAt.fill(to.Elem(), v)
	}
	if s.reads {
		return to.Addr().Interface().(treeReader).readTree(v)
	}
	switch v := v.(type) {
	case float64:
		if s.kind == reflect.Float64 {
			to.SetFloat(v)
			return nil
		}
	case string:
		if s.kind == reflect.String {
			to.SetString(v)
			return nil
		}
	case bool:
		if s.kind == reflect.Bool {
			to.SetBool(v)
			return nil
		}
	case []any:
		if s.kind == reflect.Slice {
			return s.fillList(to, v)
		}
	case map[string]any:
		if s.kind == reflect.Struct {
			return s.fillStruct(to, v)
		}
	}
	return fmt.Errorf("wire: a %T does not fit", v)
}

func (s *shape) fillList(to reflect.Value, v []any) error {
	if s.numbers {
		numbers := make([]float64, len(v))
		to.Set(reflect.ValueOf(numbers))
		for i := range v {
			var ok bool
			if numbers[i], ok = v[i].(float64); !ok {
				return fmt.Errorf("wire: a %T among numbers", v[i])
			}
		}
		return nil
	}
	to.Set(reflect.MakeSlice(to.Type(), len(v), len(v)))
	for i := range v {
		if err := s.entry.fill(to.Index(i), v[i]); err != nil {
			return err
		}
	}
	return nil
}

func (s *shape) fillStruct(to reflect.Value, v map[string]any) error {
	for name, member := range v {
		at, known := s.fields[name]
		if !known {
			return fmt.Errorf("wire: no field %q", name)
		}
		if err := at.shape.fill(to.FieldByIndex(at.index), member); err != nil {
			return err
		}
	}
	return nil
}

func (n *Number) readTree(v any) error {
	switch v := v.(type) {
	case float64:
		n.Value = v
		return nil
	case map[string]any:
		n.Spread = new(Spread)
		return FromTree(v, n.Spread)
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
		return FromTree(v, f.Sweep)
	}
	return fmt.Errorf("wire: a %T for a frequency or range", v)
}
