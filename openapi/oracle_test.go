package openapi

import (
	"encoding/json"
	"math"
	"math/rand/v2"
	"reflect"
	"slices"
	"strings"
	"testing"

	"github.com/getkin/kin-openapi/openapi3"
	"github.com/stretchr/testify/require"
)

// generator makes values for schemas, some of them broken on purpose.
type generator struct {
	*rand.Rand
	breakOneIn int // 0: never
}

func newGenerator(seed uint64, breakOneIn int) *generator {
	return &generator{rand.New(rand.NewPCG(seed, 1)), breakOneIn}
}

// seeds returns how many values of each schema are tried; fewer in a short run.
func seeds(n uint64) uint64 {
	if testing.Short() {
		return n / 5
	}
	return n
}

var junk = []any{nil, true, -1.0, 0.5, 1e300, -1e300, "", "x", strings.Repeat("é", 300), []any{}, []any{nil, 1.0}, map[string]any{}, map[string]any{"typ": 1e300}, map[string]any{"a/b~c": nil}}

func (g *generator) value(s *openapi3.Schema) any {
	if g.breakOneIn > 0 && g.IntN(g.breakOneIn) == 0 {
		return junk[g.IntN(len(junk))]
	}
	if len(s.OneOf) > 0 {
		return g.value(s.OneOf[g.IntN(len(s.OneOf))].Value)
	}
	switch {
	case s.Type == nil:
		return junk[g.IntN(len(junk))]
	case s.Type.Is("object"):
		return g.object(s)
	case s.Type.Is("array"):
		return g.array(s)
	case s.Type.Is("string"):
		return g.text(s)
	case s.Type.Is("boolean"):
		return g.IntN(2) == 0
	}
	return g.number(s)
}

func (g *generator) object(s *openapi3.Schema) any {
	o := map[string]any{}
	if extra := s.AdditionalProperties.Schema; extra != nil {
		for i := range g.IntN(4) {
			o[string(rune('a'+i))] = g.value(extra.Value)
		}
		return o
	}
	names := sortedNames(s.Properties)
	if s.MaxProps != nil && *s.MaxProps == 1 {
		name := names[g.IntN(len(names))]
		return map[string]any{name: g.value(s.Properties[name].Value)}
	}
	keep := 1 + g.IntN(4)
	for _, name := range names {
		if slices.Contains(s.Required, name) || g.IntN(keep) == 0 {
			o[name] = g.value(s.Properties[name].Value)
		}
	}
	if g.breakOneIn > 0 && g.IntN(g.breakOneIn) == 0 {
		o[names[g.IntN(len(names))]+"_x"] = 1.0
	}
	if g.breakOneIn > 0 && g.IntN(g.breakOneIn) == 0 && len(s.Required) > 0 {
		delete(o, s.Required[g.IntN(len(s.Required))])
	}
	return o
}

func (g *generator) array(s *openapi3.Schema) any {
	a := make([]any, 0, 4)
	for range int(s.MinItems) + g.IntN(3) {
		a = append(a, g.value(s.Items.Value))
	}
	return a
}

func (g *generator) text(s *openapi3.Schema) any {
	if len(s.Enum) > 0 {
		return s.Enum[g.IntN(len(s.Enum))]
	}
	candidates := []string{"", "a", "R1", "job_1", "high-side", "inductor", "output_capacitors/0", "/stage/inductor", "output_mean_v", "2026-03-01", "res_" + strings.Repeat("0a", 32)}
	return candidates[g.IntN(len(candidates))]
}

func (g *generator) number(s *openapi3.Schema) any {
	least, greatest := -1e30, 1e30
	if s.Min != nil {
		least = *s.Min
	}
	if s.Max != nil {
		greatest = *s.Max
	}
	v := least + g.Float64()*(greatest-least)
	switch g.IntN(8) {
	case 0:
		v = least
	case 1:
		v = greatest
	case 2:
		v = math.Nextafter(greatest, math.Inf(1))
	}
	if s.Type.Is("integer") && g.IntN(20) > 0 {
		v = math.Trunc(v)
	}
	return v
}

// general is the verdict of the general validator.
func general(s *openapi3.Schema, tree any) bool {
	return s.VisitJSON(tree, openapi3.DisableReadOnlyValidation(), openapi3.DisableWriteOnlyValidation(), openapi3.FailFast()) == nil
}

// onlyEnds reports whether every fault is about an end of a spread, which the
// general validator cannot hold to the bounds of the field around it.
func onlyEnds(faults []Fault) bool {
	return !slices.ContainsFunc(faults, func(f Fault) bool {
		last := f.Pointer[strings.LastIndexByte(f.Pointer, '/')+1:]
		return !slices.Contains(spreadEnds, last) || f.Keyword != "minimum" && f.Keyword != "maximum"
	})
}

func agree(t *testing.T, what string, s *openapi3.Schema, tree any, faults []Fault) {
	t.Helper()
	ok := general(s, tree)
	if ok == (len(faults) == 0) || ok && onlyEnds(faults) {
		return
	}
	b, err := json.Marshal(tree)
	require.NoError(t, err)
	t.Fatalf("%s: the general validator says %v, the compiled check %v, on %s", what, ok, faults, cut(string(b), 2000))
}

// The compiled check reaches the verdict of a general validator on the same
// document, for every component schema, on sound and on broken values.
func TestVerdictOfTheGeneralValidator(t *testing.T) {
	document := loadGeneral(t)
	verdicts := map[bool]int{}
	for name, ref := range document.Components.Schemas {
		for seed := range seeds(90) {
			tree := newGenerator(seed, []int{0, 10, 40}[seed%3]).value(ref.Value)
			faults := validate(Load().component(name), tree, nil)
			agree(t, name, ref.Value, tree, faults)
			verdicts[len(faults) == 0]++
			require.LessOrEqual(t, len(faults), MaxFaults)
		}
	}
	require.Greater(t, verdicts[true], 500, "hardly any sound value")
	require.Greater(t, verdicts[false], 500, "hardly any broken value")
}

// alternative is a Go type for a union.
type alternative struct{ v any }

func (a alternative) ContractValue() any            { return a.v }
func (a alternative) MarshalJSON() ([]byte, error)  { return json.Marshal(a.v) }
func (a *alternative) UnmarshalJSON(b []byte) error { return json.Unmarshal(b, &a.v) }

// goType builds a Go type for a schema: structs with optional pointers, slices,
// strings and numbers, as a hand-written wire type would have.
func goType(s *openapi3.Schema, depth int) reflect.Type {
	switch {
	case len(s.OneOf) > 0:
		return reflect.TypeFor[alternative]()
	case s.Type == nil || depth > 6:
		return reflect.TypeFor[any]()
	case s.Type.Is("object") && s.AdditionalProperties.Schema != nil:
		return reflect.MapOf(reflect.TypeFor[string](), goType(s.AdditionalProperties.Schema.Value, depth+1))
	case s.Type.Is("object"):
		var fields []reflect.StructField
		for i, name := range sortedNames(s.Properties) {
			f := reflect.StructField{Name: "F" + string(rune('a'+i%26)) + strings.Repeat("x", i/26), Type: goType(s.Properties[name].Value, depth+1)}
			if slices.Contains(s.Required, name) {
				f.Tag = reflect.StructTag(`json:"` + name + `"`)
			} else {
				f.Tag = reflect.StructTag(`json:"` + name + `,omitzero"`)
				if f.Type.Kind() == reflect.Float64 || f.Type.Kind() == reflect.Struct || f.Type.Kind() == reflect.Bool {
					f.Type = reflect.PointerTo(f.Type)
				}
			}
			fields = append(fields, f)
		}
		return reflect.StructOf(fields)
	case s.Type.Is("array"):
		return reflect.SliceOf(goType(s.Items.Value, depth+1))
	case s.Type.Is("string"):
		return reflect.TypeFor[string]()
	case s.Type.Is("boolean"):
		return reflect.TypeFor[bool]()
	case s.Type.Is("integer"):
		return reflect.TypeFor[int64]()
	}
	return reflect.TypeFor[float64]()
}

// A Go value gets the verdict that its JSON gets.
func TestVerdictOnGoValues(t *testing.T) {
	document := loadGeneral(t)
	verdicts := map[bool]int{}
	for name, ref := range document.Components.Schemas {
		typ := goType(ref.Value, 0)
		for seed := range seeds(60) {
			generated, err := json.Marshal(newGenerator(seed, []int{0, 60}[seed%2]).value(ref.Value))
			require.NoError(t, err)
			v := reflect.New(typ)
			if json.Unmarshal(generated, v.Interface()) != nil {
				continue // not a value of this Go type
			}
			written, err := json.Marshal(v.Interface())
			require.NoError(t, err)
			var tree any
			require.NoError(t, json.Unmarshal(written, &tree))
			faults := Load().ValidateAs(name, v.Interface())
			agree(t, name, ref.Value, tree, faults)
			verdicts[len(faults) == 0]++
		}
	}
	require.Greater(t, verdicts[true], 150, "hardly any sound value")
	require.Greater(t, verdicts[false], 100, "hardly any broken value")
}

func FuzzRequestVerdict(f *testing.F) {
	document := loadGeneral(f)
	for seed := range uint64(8) {
		f.Add(seed, `{"stage":{}}`)
	}
	names := sortedNames(document.Components.Schemas)
	f.Fuzz(func(t *testing.T, seed uint64, text string) {
		name := names[seed%uint64(len(names))]
		s := document.Components.Schemas[name].Value
		tree := newGenerator(seed, 20).value(s)
		agree(t, name, s, tree, validate(Load().component(name), tree, nil))
		if json.Unmarshal([]byte(text), &tree) == nil {
			agree(t, name, s, tree, validate(Load().component(name), tree, nil))
		}
	})
}
