package contract

import (
	"encoding/json"
	"io/fs"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/openapi"
)

func exampleOf(t testing.TB, name string) object {
	t.Helper()
	body, err := fs.ReadFile(openapi.Examples(), name)
	require.NoError(t, err)
	var d object
	require.NoError(t, json.Unmarshal(body, &d))
	return d
}

// The three verdicts of the examples, and why.
func TestExamplesOfSubstitutions(t *testing.T) {
	r := send(t, "POST", server(t)+"/v1/substitutions", encode(t, exampleOf(t, "buoy-5v0/substitutions.json")))
	require.Equal(t, 200, r.status, "%s", r.body)
	answer := r.tree(t).(object)
	require.Equal(t, "pass", answer["before_verdict"])
	require.Equal(t, "rejected", answer["verdict"])
	items := map[string]object{}
	for _, i := range answer["items"].([]any) {
		items[i.(object)["id"].(string)] = i.(object)
	}
	require.Equal(t, "accepted", items["higher-saturation"]["verdict"])
	require.Empty(t, items["higher-saturation"]["reasons"])
	require.InDelta(t, 1, items["higher-saturation"]["rank"], 0)

	// Rejected for what only the worst case shows: nominally the margin is twice the limit.
	rejected := items["smaller-case"]
	require.Equal(t, "rejected", rejected["verdict"])
	reasons := rejected["reasons"].([]any)
	require.Len(t, reasons, 1)
	require.Equal(t, "general-practice/gain-margin", reasons[0].(object)["rule"])
	for _, q := range rejected["quantities"].([]any) {
		if q := q.(object); q["quantity"] == "gain_margin_db" {
			require.Greater(t, q["nominal_after"], 12.0)
			require.Less(t, q["least_after"], 6.0)
			require.Greater(t, q["least_before"], 6.0)
		}
	}

	review := items["sparse-data-sheet"]
	require.Equal(t, "needs-review", review["verdict"])
	for _, want := range []string{"rating/saturation_a", "rating/heating_a", "inductance_at_current", "core", "thermal"} {
		require.Contains(t, review["missing"], "/replacements/2/inductor/"+want)
	}
}

// swap asks whether an inductor may replace that of the small stage.
func swap(t *testing.T, server string, part object) object {
	t.Helper()
	d := small(t)
	d["replacements"] = []any{object{"role": "inductor", "inductor": part}}
	r := send(t, "POST", server+"/v1/substitutions", encode(t, d))
	require.Equal(t, 200, r.status, "%s", r.body)
	declared(t, "substitutions", r)
	return r.tree(t).(object)["items"].([]any)[0].(object)
}

func TestPartialDataNeedReview(t *testing.T) {
	server := server(t)
	whole := func() object { return at(small(t)["stage"], "inductor").(object) }
	require.Equal(t, "accepted", swap(t, server, whole())["verdict"], "the same part again")
	for name, c := range map[string]struct {
		edit    func(part object)
		missing string
	}{
		"no-tolerance":   {func(p object) { p["inductance_h"] = 6.8e-6 }, "/replacements/0/inductor/inductance_h/tol"},
		"no-resistance":  {func(p object) { delete(p, "dc_resistance_ohm") }, "/replacements/0/inductor/dc_resistance_ohm"},
		"no-thermal":     {func(p object) { delete(p, "thermal") }, "/replacements/0/inductor/thermal"},
		"no-saturation":  {func(p object) { delete(p["rating"].(object), "saturation_a") }, "/replacements/0/inductor/rating/saturation_a"},
		"no-rating-left": {func(p object) { delete(p, "rating") }, "/replacements/0/inductor/rating/heating_a"},
	} {
		t.Run(name, func(t *testing.T) {
			part := whole()
			c.edit(part)
			item := swap(t, server, part)
			require.Equal(t, "needs-review", item["verdict"], "%v", item["reasons"])
			require.Contains(t, item["missing"], c.missing)
		})
	}
}

func TestReplacementFaultsPointAtFields(t *testing.T) {
	server := server(t)
	for name, c := range map[string]struct {
		replacement object
		pointer     string
	}{
		"no-part":       {object{"role": "inductor"}, "/replacements/0"},
		"wrong-part":    {object{"role": "inductor", "diode": object{"threshold_v": 0.4}}, "/replacements/0"},
		"two-parts":     {object{"role": "inductor", "inductor": object{"inductance_h": 1e-6}, "diode": object{"threshold_v": 0.4}}, "/replacements/0"},
		"no-such-bank":  {object{"role": "output_capacitors/3", "capacitor": object{"capacitance_f": 1e-5}}, "/replacements/0/role"},
		"no-diode-here": {object{"role": "diode", "diode": object{"threshold_v": 0.4}}, "/replacements/0/role"},
		"falling-table": {object{"role": "inductor", "inductor": object{"inductance_h": 1e-6, "inductance_at_current": []any{object{"current_a": 2.0, "multiplier_ratio": 1.0}, object{"current_a": 1.0, "multiplier_ratio": 0.9}}}}, "/replacements/0/inductor/inductance_at_current/1/current_a"},
	} {
		t.Run(name, func(t *testing.T) {
			d := small(t)
			d["replacements"] = []any{c.replacement}
			r := send(t, "POST", server+"/v1/substitutions", encode(t, d))
			require.Equal(t, 422, r.status, "%s", r.body)
			require.Contains(t, string(r.body), `"pointer":"`+c.pointer+`"`)
		})
	}
}

// board is a bill of material for the small stage.
func board(t *testing.T, bill object) object {
	t.Helper()
	d := small(t)
	at(d["stage"], "output_capacitors/0").(object)["kind"] = "ceramic-class-1"
	return object{"bom": bill, "rails": []any{object{
		"name": "small", "stage": d["stage"], "requirement": d["requirement"],
		"bindings":           []any{object{"role": "inductor", "designators": []any{"L1"}}, object{"role": "output_capacitors/0", "designators": []any{"C1", "C2", "C3", "C4"}}},
		"roles_without_line": []any{"high_side", "low_side", "input_capacitors/0", "feedback/upper_ohm", "feedback/lower_ohm"},
		"designator_ranges":  []any{object{"from": "C1", "to": "C9"}},
	}}}
}

func csvBill(text string, columns object) object {
	return object{"csv": object{"text": text, "columns": columns}}
}

var columns = object{"designators": "Reference", "value": "Value"}

func TestBomAgreesOrSaysWhere(t *testing.T) {
	server := server(t)
	for name, c := range map[string]struct {
		text, verdict, line string
	}{
		"agrees":      {"\ufeffReference;Value\r\nL1;6u8 20% 12A\r\nC1-C4;22u 0% 16V C0G\r\n", "agrees", ""},
		"tab":         {"Value\tReference\n6u8 20% 12A\tL1\n22u 0% 16V C0G\tC1 C2 C3 C4\n", "agrees", ""},
		"value":       {"Reference,Value\nL1,4u7 20%\nC1-C4,22u 0% 16V C0G\n", "differs", "differs"},
		"tolerance":   {"Reference,Value\nL1,6u8 30%\nC1-C4,22u 0% 16V C0G\n", "differs", "differs"},
		"rating":      {"Reference,Value\nL1,6u8 20% 12A\nC1-C4,22u 0% 10V C0G\n", "differs", "differs"},
		"unreadable":  {"Reference,Value\nL1,six eight\nC1-C4,22u 0% 16V C0G\n", "incomplete", "unreadable"},
		"unsaid":      {"Reference,Value\nL1,6u8\nC1-C4,22u 0% 16V C0G\n", "incomplete", "needs-review"},
		"missing":     {"Reference,Value\nL1,6u8 20% 12A\nC1-C3,22u 0% 16V C0G\n", "differs", "missing"},
		"on-no-board": {"Reference,Value\nL2,6u8 20%\n", "differs", "missing"},
	} {
		t.Run(name, func(t *testing.T) {
			r := send(t, "POST", server+"/v1/bom-checks", encode(t, board(t, csvBill(c.text, columns))))
			require.Equal(t, 200, r.status, "%s", r.body)
			declared(t, "bomChecks", r)
			answer := r.tree(t).(object)
			require.Equal(t, c.verdict, answer["verdict"], "%s", r.body)
			if c.line != "" {
				require.Contains(t, string(r.body), `"verdict":"`+c.line+`"`)
			}
		})
	}
	r := send(t, "POST", server+"/v1/bom-checks", encode(t, board(t, csvBill("Reference,Value\nL1,6u8 20% 12A\nC1-C4,22u 0% 16V C0G\nC7,1u\n", columns))))
	unbound := r.tree(t).(object)["unbound_lines"].([]any)
	require.Equal(t, object{"rail": "small", "line": 4.0, "designators": []any{"C7"}, "value": "1u"}, unbound[0])
}

func TestBomFaultsPointAtTextAndMapping(t *testing.T) {
	server := server(t)
	for name, c := range map[string]struct {
		bill            object
		pointer, detail string
	}{
		"quote":          {csvBill("Reference,Value\nL1,\"6u8\nC1,22u\n", columns), "/bom/csv/text", "line "},
		"cells":          {csvBill("Reference,Value\nL1,6u8,more\n", columns), "/bom/csv/text", "line 2"},
		"designators":    {csvBill("Reference,Value\nC9-C1,6u8\n", columns), "/bom/csv/text", "line 2, column 1"},
		"no-such-column": {csvBill("Reference,Value\nL1,6u8\n", object{"designators": "Reference", "value": "Worth"}), "/bom/csv/columns/value", "Worth"},
		"empty":          {csvBill("", columns), "/bom/csv/text", "header"},
	} {
		t.Run(name, func(t *testing.T) {
			r := send(t, "POST", server+"/v1/bom-checks", encode(t, board(t, c.bill)))
			require.Equal(t, 422, r.status, "%s", r.body)
			require.Contains(t, string(r.body), `"pointer":"`+c.pointer+`"`)
			require.Contains(t, string(r.body), c.detail)
		})
	}
}

func TestBomRunsApprovedAlternates(t *testing.T) {
	server := server(t)
	d := board(t, csvBill("Reference,Value,Part\nL1,6u8 20%,ALT\nC1-C4,22u 0% 16V C0G,\n", object{"designators": "Reference", "value": "Value", "part_number": "Part"}))
	rail := d["rails"].([]any)[0].(object)
	rail["stage"].(object)["inductor"].(object)["part_number"] = "PROVEN"
	part := at(small(t)["stage"], "inductor").(object)
	rail["alternates"] = []any{object{"role": "inductor", "part_number": "ALT", "replacement": object{"role": "inductor", "inductor": part}}}
	r := send(t, "POST", server+"/v1/bom-checks", encode(t, d))
	require.Equal(t, 200, r.status, "%s", r.body)
	require.Equal(t, "agrees", r.tree(t).(object)["verdict"], "%s", r.body)
	require.Contains(t, string(r.body), `"verdict":"alternate-accepted"`)
	part["rating"].(object)["saturation_a"] = 5.0
	r = send(t, "POST", server+"/v1/bom-checks", encode(t, d))
	require.Equal(t, "differs", r.tree(t).(object)["verdict"])
	require.Contains(t, string(r.body), `"verdict":"alternate-rejected"`)
}
