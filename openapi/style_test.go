package openapi

import (
	"encoding/json"
	"fmt"
	"slices"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"
)

// unitOfSuffix ties the end of a name to the UCUM code of its number. Longer
// suffixes come first.
var unitOfSuffix = []struct{ suffix, unit string }{
	{"_v_per_k", "V/K"},
	{"_k_per_w", "K/W"},
	{"_v_per_s", "V/s"},
	{"_a_per_s", "A/s"},
	{"_w_per_m3", "W/m3"},
	{"_degc", "Cel"},
	{"_ratio", "1"},
	{"_deg", "deg"},
	{"_ohm", "Ohm"},
	{"_db", "dB"},
	{"_hz", "Hz"},
	{"_m2", "m2"},
	{"_m3", "m3"},
	{"_v", "V"},
	{"_a", "A"},
	{"_w", "W"},
	{"_s", "s"},
	{"_h", "H"},
	{"_f", "F"},
	{"_c", "C"},
	{"_j", "J"},
	{"_t", "T"},
	{"_k", "K"},
}

// unitOfName holds the names whose number has a unit that no suffix tells:
// siemens share their letter with seconds, and some names are fixed by the trade
// or by the meaning of the object around them.
var unitOfName = map[string]string{
	"transconductance_s": "S",
	"k":                  "W/m3", "alpha": "1", "beta": "1",
	"tol": "1", "match_tol": "1", "cp": "1", "cpk": "1", "percentile_cpk": "1", "score": "1", "cost": "1", "values": "1", "quantiles": "1",
}

// inherited are the names of numbers whose unit is that of the object around
// them, or of a neighbour that x-unit-of names.
var inherited = []string{"min", "typ", "max", "items"}

// walk visits every schema of the contract with its place and the nearest
// property name.
func walk(v any, at, name string, visit func(at, name string, s map[string]any)) {
	switch v := v.(type) {
	case map[string]any:
		_, typed := v["type"].(string)
		if _, one := v["oneOf"]; typed || one {
			visit(at, name, v)
		}
		for key, child := range v {
			if key == "example" || key == "examples" || key == "enum" {
				continue
			}
			next := name
			if strings.HasSuffix(at, "/properties") || strings.HasSuffix(at, "/schemas") {
				next = key
			}
			walk(child, at+"/"+key, next, visit)
		}
	case []any:
		for i, child := range v {
			walk(child, fmt.Sprintf("%s/%d", at, i), name, visit)
		}
	}
}

func eachSchema(t *testing.T, visit func(at, name string, s map[string]any)) {
	t.Helper()
	var document map[string]any
	require.NoError(t, json.Unmarshal(jsonBytes, &document))
	walk(document["components"].(map[string]any)["schemas"], "", "", visit)
	walk(document["components"].(map[string]any)["parameters"], "/parameters", "", visit)
	walk(document["paths"], "/paths", "", visit)
}

func TestEverythingIsBounded(t *testing.T) {
	eachSchema(t, func(at, _ string, s map[string]any) {
		switch s["type"] {
		case "number":
			require.Equal(t, "double", s["format"], at)
			require.Contains(t, s, "minimum", at)
			require.Contains(t, s, "maximum", at)
			require.True(t, s["x-unit"] != nil || s["x-unit-of"] != nil, "%s: a number without unit", at)
		case "integer":
			require.Contains(t, s, "minimum", at)
			require.Contains(t, s, "maximum", at)
		case "string":
			require.True(t, s["maxLength"] != nil || s["enum"] != nil, "%s: an unbounded string", at)
		case "array":
			require.Contains(t, s, "maxItems", at)
			require.Contains(t, s, "items", at)
		case "object":
			_, extra := s["additionalProperties"].(map[string]any)
			require.True(t, !extra || s["maxProperties"] != nil, "%s: an unbounded map", at)
		}
	})
}

func TestNamesTellUnits(t *testing.T) {
	checked := 0
	eachSchema(t, func(at, name string, s map[string]any) {
		unit, ok := s["x-unit"].(string)
		if !ok || slices.Contains(inherited, name) || strings.HasPrefix(at, "/parameters") {
			return
		}
		checked++
		require.Equal(t, unitByName(name), unit, "%s: the name and x-unit disagree", at)
	})
	require.Greater(t, checked, 300)
}

func unitByName(name string) string {
	if unit, ok := unitOfName[name]; ok {
		return unit
	}
	for _, s := range unitOfSuffix {
		if strings.HasSuffix(name, s.suffix) {
			return s.unit
		}
	}
	return "no unit"
}

// A name with the suffix of a unit is a number, or numbers, of that unit.
func TestSuffixesAreKeptForNumbers(t *testing.T) {
	eachSchema(t, func(at, name string, s map[string]any) {
		if unitByName(name) == "no unit" || s["type"] != "string" && s["type"] != "boolean" && s["type"] != "integer" {
			return
		}
		require.Fail(t, "the name ends like a quantity", "%s: %v", at, s["type"])
	})
}

// Requests are closed, answers are open, and both stay within what OpenAPI 3.0
// and 3.1 share.
func TestClosedRequestsOpenAnswers(t *testing.T) {
	shared := sharedWithRequests(t)
	eachSchema(t, func(at, _ string, s map[string]any) {
		for _, word := range []string{"allOf", "anyOf", "not", "nullable", "exclusiveMinimum", "exclusiveMaximum", "const", "uniqueItems", "discriminator"} {
			require.NotContains(t, s, word, at)
		}
		if s["type"] != "object" || !strings.HasPrefix(at, "/") {
			return
		}
		if _, byName := s["additionalProperties"].(map[string]any); byName {
			return
		}
		component, _, _ := strings.Cut(at[1:], "/")
		closed := s["additionalProperties"] == false
		require.Equal(t, shared[component], closed, "%s", at)
	})
}

// sharedWithRequests lists the components that a request body can contain.
func sharedWithRequests(t *testing.T) map[string]bool {
	t.Helper()
	var document map[string]any
	require.NoError(t, json.Unmarshal(jsonBytes, &document))
	found := map[string]bool{}
	var follow func(v any)
	follow = func(v any) {
		switch v := v.(type) {
		case map[string]any:
			if ref, ok := v["$ref"].(string); ok {
				name := strings.TrimPrefix(ref, componentPrefix)
				if !found[name] {
					found[name] = true
					follow(document["components"].(map[string]any)["schemas"].(map[string]any)[name])
				}
			}
			for _, child := range v {
				follow(child)
			}
		case []any:
			for _, child := range v {
				follow(child)
			}
		}
	}
	for _, item := range document["paths"].(map[string]any) {
		for _, o := range item.(map[string]any) {
			follow(o.(map[string]any)["requestBody"])
		}
	}
	require.True(t, found["Stage"])
	return found
}

// The only alternatives are a number or an object (a spread, a range), and in rule
// packs a number or the text of an expression.
func TestAlternativesDifferInType(t *testing.T) {
	spreads := 0
	eachSchema(t, func(at, _ string, s map[string]any) {
		branches, ok := s["oneOf"].([]any)
		if !ok {
			return
		}
		require.Len(t, branches, 2, at)
		first := branches[0].(map[string]any)
		require.Equal(t, "number", first["type"], at)
		if s["x-expression"] == true {
			require.Equal(t, "string", branches[1].(map[string]any)["type"], at)
			return
		}
		require.Contains(t, branches[1], "$ref", at)
		require.Equal(t, s["x-unit"], first["x-unit"], at)
		if s["x-spread"] == true {
			require.Equal(t, componentPrefix+"Spread", branches[1].(map[string]any)["$ref"], at)
			spreads++
		}
	})
	require.Greater(t, spreads, 50)
}
