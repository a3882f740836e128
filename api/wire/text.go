package wire

import (
	"encoding/json"
	"fmt"
	"math"
	"reflect"
	"strconv"
	"strings"
	"sync"
	"unicode/utf8"
)

// AppendJSON appends v as encoding/json writes it, byte for byte. What has to be
// known of a type is found out once; what is rare, such as maps and strings that
// need escapes, is left to encoding/json.
func AppendJSON(b []byte, v any) ([]byte, error) {
	r := reflect.ValueOf(v)
	return writerOf(r.Type())(b, r)
}

type writer func(b []byte, v reflect.Value) ([]byte, error)

// textAppender is a type of this package that writes its own form.
type textAppender interface {
	appendText(b []byte) ([]byte, error)
}

var (
	appenderType  = reflect.TypeFor[textAppender]()
	marshalerType = reflect.TypeFor[json.Marshaler]()
	zeroerType    = reflect.TypeFor[interface{ IsZero() bool }]()
)

var writers sync.Map // reflect.Type -> writer

func writerOf(t reflect.Type) writer {
	if w, ok := writers.Load(t); ok {
		return w.(writer)
	}
	w := newWriter(t)
	writers.Store(t, w)
	return w
}

func newWriter(t reflect.Type) writer {
	switch {
	case t.Kind() == reflect.Pointer && !t.Implements(appenderType):
		return writePointer(t)
	case t.Implements(appenderType):
		return func(b []byte, v reflect.Value) ([]byte, error) { return v.Interface().(textAppender).appendText(b) }
	case t.Implements(marshalerType) || reflect.PointerTo(t).Implements(marshalerType):
		return writeRare
	}
	switch t.Kind() {
	case reflect.Float64:
		return writeFloat
	case reflect.String:
		return writeString
	case reflect.Bool:
		return func(b []byte, v reflect.Value) ([]byte, error) { return strconv.AppendBool(b, v.Bool()), nil }
	case reflect.Int, reflect.Int64:
		return func(b []byte, v reflect.Value) ([]byte, error) { return strconv.AppendInt(b, v.Int(), 10), nil }
	case reflect.Struct:
		return writeStruct(t)
	case reflect.Slice:
		if t.Elem().Kind() != reflect.Uint8 {
			return writeList(t)
		}
	}
	return writeRare
}

func writeRare(b []byte, v reflect.Value) ([]byte, error) {
	text, err := json.Marshal(v.Interface())
	return append(b, text...), err
}

func writePointer(t reflect.Type) writer {
	elem := writerOf(t.Elem())
	return func(b []byte, v reflect.Value) ([]byte, error) {
		if v.IsNil() {
			return append(b, "null"...), nil
		}
		return elem(b, v.Elem())
	}
}

func writeFloat(b []byte, v reflect.Value) ([]byte, error) {
	f := v.Float()
	if math.IsNaN(f) || math.IsInf(f, 0) {
		return b, fmt.Errorf("wire: JSON has no number %v", f)
	}
	return appendFloat(b, f), nil
}

func writeString(b []byte, v reflect.Value) ([]byte, error) {
	s := v.String()
	for i := range len(s) {
		switch c := s[i]; {
		case c < ' ' || c >= utf8.RuneSelf, c == '"', c == '\\', c == '<', c == '>', c == '&':
			return writeRare(b, v)
		}
	}
	return append(append(append(b, '"'), s...), '"'), nil
}

func writeList(t reflect.Type) writer {
	elem := writerOf(t.Elem())
	return func(b []byte, v reflect.Value) (_ []byte, err error) {
		if v.IsNil() {
			return append(b, "null"...), nil
		}
		b = append(b, '[')
		for i := range v.Len() {
			if i > 0 {
				b = append(b, ',')
			}
			if b, err = elem(b, v.Index(i)); err != nil {
				return b, err
			}
		}
		return append(b, ']'), nil
	}
}

// writtenField is a field of a struct as it stands in the text.
type writtenField struct {
	index      []int
	head       string // its name, quoted, and a colon
	write      writer
	omitZero   bool
	asksItself bool // its type says what zero is
}

func writeStruct(t reflect.Type) writer {
	fields := writtenFields(t, nil)
	return func(b []byte, v reflect.Value) (_ []byte, err error) {
		b = append(b, '{')
		first := true
		for i := range fields {
			f := &fields[i]
			member := v.Field(f.index[0])
			for _, below := range f.index[1:] {
				member = member.Field(below)
			}
			if f.omitZero && f.isZero(member) {
				continue
			}
			if !first {
				b = append(b, ',')
			}
			first = false
			if b, err = f.write(append(b, f.head...), member); err != nil {
				return b, err
			}
		}
		return append(b, '}'), nil
	}
}

// writtenFields lists the fields of a struct and of those embedded in it.
func writtenFields(t reflect.Type, index []int) []writtenField {
	var list []writtenField
	for i := range t.NumField() {
		f := t.Field(i)
		at := append(append([]int{}, index...), i)
		tag := f.Tag.Get("json")
		if f.Anonymous && tag == "" {
			list = append(list, writtenFields(f.Type, at)...)
			continue
		}
		if !f.IsExported() || tag == "-" {
			continue
		}
		name, options, _ := strings.Cut(tag, ",")
		list = append(list, writtenField{
			index: at, head: strconv.Quote(name) + ":", write: writerOf(f.Type),
			omitZero: options == "omitzero", asksItself: f.Type.Implements(zeroerType),
		})
	}
	return list
}

func (f *writtenField) isZero(v reflect.Value) bool {
	switch {
	case v.Kind() == reflect.Pointer:
		return v.IsNil()
	case f.asksItself:
		return v.Interface().(interface{ IsZero() bool }).IsZero()
	}
	return v.IsZero()
}
