package openapi

import (
	"encoding/json"
	"strings"
	"testing"
	"time"

	"github.com/stretchr/testify/require"
)

// request returns a sound steady-state request with one thing changed.
func request(t *testing.T, change func(request, stage, point map[string]any)) map[string]any {
	t.Helper()
	example, err := json.Marshal(Load().operation("steadyState").Example)
	require.NoError(t, err)
	var tree map[string]any
	require.NoError(t, json.Unmarshal(example, &tree))
	change(tree, tree["stage"].(map[string]any), tree["point"].(map[string]any))
	return tree
}

func TestFaultsPointAtTheirPlace(t *testing.T) {
	type object = map[string]any
	cases := map[string]struct {
		change func(request, stage, point object)
		want   Fault
	}{
		"inductance of 22 H": {
			func(_, s, _ object) { s["inductor"].(object)["inductance_h"] = 22.0 },
			Fault{"/stage/inductor/inductance_h", "maximum", "above what is accepted", "at most 1", "22", "H"},
		},
		"22 H as a spread": {
			func(_, s, _ object) { s["inductor"].(object)["inductance_h"] = object{"typ": 22.0, "tol": 0.2} },
			Fault{"/stage/inductor/inductance_h/typ", "maximum", "above what is accepted", "at most 1", "22", "H"},
		},
		"wrong type in a spread is told of the spread": {
			func(_, s, _ object) { s["inductor"].(object)["inductance_h"] = object{"typ": 1e-6, "tol": "20 %"} },
			Fault{"/stage/inductor/inductance_h/tol", "type", "of the wrong type", "a number", `"20 %"`, "1"},
		},
		"a text for a number or spread": {
			func(_, s, _ object) { s["inductor"].(object)["inductance_h"] = "6.8 µH" },
			Fault{"/stage/inductor/inductance_h", "type", "of the wrong type", "a number or a spread such as {typ, tol} or {min, typ, max}", `"6.8 µH"`, "H"},
		},
		"null": {
			func(_, _, p object) { p["ambient_degc"] = nil },
			Fault{"/point/ambient_degc", "type", "of the wrong type", "a number", "null", "Cel"},
		},
		"unknown field, unit left out": {
			func(_, s, _ object) { s["inductor"].(object)["inductance"] = 1e-6 },
			Fault{"/stage/inductor/inductance", "additionalProperties", "unknown field", "inductance_h", "1e-06", ""},
		},
		"unknown field, misspelt": {
			func(_, s, _ object) { s["inductor"].(object)["dc_resitance_ohm"] = 1e-3 },
			Fault{"/stage/inductor/dc_resitance_ohm", "additionalProperties", "unknown field", "dc_resistance_ohm", "0.001", ""},
		},
		"unknown field whose name needs escaping": {
			func(_, s, _ object) {
				s["feedback"] = object{"reference_v": 0.8, "upper_ohm": 1.0, "lower_ohm": 1.0, "a/b~c": true}
			},
			Fault{"/stage/feedback/a~1b~0c", "additionalProperties", "unknown field", "one of lower_ohm, reference_v or upper_ohm", "true", ""},
		},
		"missing field": {
			func(_, s, _ object) { delete(s["inductor"].(object), "inductance_h") },
			Fault{"/stage/inductor/inductance_h", "required", "missing", "a number or a spread such as {typ, tol} or {min, typ, max}", "", "H"},
		},
		"entry of an array": {
			func(_, s, _ object) { s["output_capacitors"].([]any)[0].(object)["count"] = 1.5 },
			Fault{"/stage/output_capacitors/0/count", "type", "not a whole number", "a whole number", "1.5", ""},
		},
		"too few": {
			func(_, s, _ object) { s["output_capacitors"] = []any{} },
			Fault{"/stage/output_capacitors", "minItems", "too few entries", "at least 1 entry", "0 entries", ""},
		},
		"not a value of the list": {
			func(_, s, _ object) { s["rectifier"] = "schottky" },
			Fault{"/stage/rectifier", "enum", "not one of the values that are accepted", "synchronous, synchronous-emulated or diode", `"schottky"`, ""},
		},
		"two controls": {
			func(_, _, p object) { p["control"] = object{"regulate_to_v": 5.0, "duty_ratio": 0.2} },
			Fault{"/point/control", "maxProperties", "exactly one member is needed", "exactly one of duty_ratio, regulate_by or regulate_to_v", "2 members", ""},
		},
		"long text is cut": {
			func(_, s, _ object) { s["name"] = strings.Repeat("x", 1000) },
			Fault{"/stage/name", "maxLength", "too long", "at most 128 characters", `"` + strings.Repeat("x", 76) + "…", ""},
		},
	}
	for name, c := range cases {
		t.Run(name, func(t *testing.T) {
			require.Equal(t, []Fault{c.want}, Load().ValidateRequest("steadyState", request(t, c.change)))
		})
	}
	require.Empty(t, Load().ValidateRequest("steadyState", request(t, func(_, _, _ object) {})))
}

func TestFaultsComeAllAtOnceInFixedOrder(t *testing.T) {
	tree := request(t, func(r, s, p map[string]any) {
		r["waveform_points"] = -1.0
		s["zz"], s["aa"] = 1.0, 1.0
		p["input_v"] = "24"
	})
	var at []string
	for range 20 {
		at = at[:0]
		for _, f := range Load().ValidateRequest("steadyState", tree) {
			at = append(at, f.Pointer)
		}
		require.Equal(t, []string{"/point/input_v", "/stage/aa", "/stage/zz", "/waveform_points"}, at)
	}
}

func TestManyFaultsAreCapped(t *testing.T) {
	points := make([]any, 1000)
	for i := range points {
		points[i] = strings.Repeat("x", 1000)
	}
	tree := request(t, func(r, _, _ map[string]any) { delete(r, "waveform_points"); delete(r, "point"); r["points"] = points })
	start := time.Now()
	faults := Load().ValidateRequest("losses", tree)
	require.Len(t, faults, MaxFaults)
	require.Equal(t, "/points/49", faults[49].Pointer)
	require.Less(t, time.Since(start), 100*time.Millisecond)
}

// An array beyond its bound is not looked into.
func TestLongArrayCostsNothing(t *testing.T) {
	tree := request(t, func(r, _, _ map[string]any) { delete(r, "waveform_points"); r["points"] = make([]any, 2_000_000) })
	faults := Load().ValidateRequest("losses", tree)
	require.Len(t, faults, 1)
	require.Equal(t, "maxItems", faults[0].Keyword)
}

func TestQueryAndPathParameters(t *testing.T) {
	c := Load()
	require.Empty(t, c.ValidateQuery("losses", map[string][]string{"explain": {"true"}}))
	require.Equal(t, []Fault{{Keyword: "type", Detail: "query parameter explain: of the wrong type", Limit: "true or false", Received: `"yes"`}},
		c.ValidateQuery("losses", map[string][]string{"explain": {"yes"}}))
	require.Equal(t, []Fault{{Keyword: "additionalProperties", Detail: "unknown query parameter explian", Limit: "explain, timings, picture, quantity, item, width_px", Received: "explian"}},
		c.ValidateQuery("losses", map[string][]string{"explian": {"true"}}))
	require.Equal(t, []Fault{{Keyword: "maxItems", Detail: "query parameter explain given more than once", Limit: "one value"}},
		c.ValidateQuery("losses", map[string][]string{"explain": {"true", "true"}}))
	require.Equal(t, "maximum", c.ValidateQuery("listJobs", map[string][]string{"limit": {"1000"}})[0].Keyword)
	require.Empty(t, c.ValidateQuery("listJobs", map[string][]string{"limit": {"10"}}))
	require.Empty(t, c.ValidatePathParameter("getJob", "id", "job_01hzx7"))
	require.Equal(t, "pattern", c.ValidatePathParameter("getJob", "id", "../../etc")[0].Keyword)
}

func TestUndeclaredStatus(t *testing.T) {
	require.Equal(t, "status", Load().ValidateResponse("losses", 418, map[string]any{})[0].Keyword)
	require.Empty(t, Load().ValidateResponse("getDocs", 200, nil), "a body without schema")
	require.Equal(t, "required", Load().ValidateResponse("losses", 422, map[string]any{"title": "x", "status": 422.0})[0].Keyword)
}
