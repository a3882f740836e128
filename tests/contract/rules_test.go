package contract

import (
	"bytes"
	"encoding/json"
	"math/rand/v2"
	"net/http/httptest"
	"os"
	"strings"
	"testing"

	"github.com/santhosh-tekuri/jsonschema/v6"
	"github.com/stretchr/testify/require"

	"railproof/api"
	"railproof/service"
)

// smallCheck is a check that is answered quickly: no loop, no load step.
const smallCheck = `{
  "stage": {
    "name": "small", "rectifier": "synchronous", "switching_frequency_hz": 500000,
    "high_side": {"on_resistance_ohm": 0.009, "rating": {"drain_source_v": 45, "gate_source_v": 16, "drain_current_a": 45, "junction_degc": 150}, "thermal": {"junction_to_ambient_k_per_w": 32}},
    "low_side": {"on_resistance_ohm": 0.0045, "rating": {"drain_source_v": 45, "gate_source_v": 16, "drain_current_a": 45, "junction_degc": 150}, "thermal": {"junction_to_ambient_k_per_w": 32}},
    "inductor": {"inductance_h": {"typ": 6.8e-6, "tol": 0.2}, "dc_resistance_ohm": 0.007, "rating": {"saturation_a": 12, "heating_a": 9, "winding_degc": 125}, "thermal": {"junction_to_ambient_k_per_w": 22}},
    "output_capacitors": [{"capacitance_f": 2.2e-5, "count": 4, "esr_ohm": 0.003, "kind": "tantalum-polymer", "rating": {"voltage_v": 16, "ripple_current_a": 4, "temperature_degc": 125}}],
    "input_capacitors": [{"capacitance_f": 1e-5, "count": 3, "esr_ohm": 0.003, "kind": "film", "rating": {"voltage_v": 50, "ripple_current_a": 4, "temperature_degc": 125}}],
    "feedback": {"reference_v": {"typ": 0.8, "tol": 0.01}, "upper_ohm": 56200, "lower_ohm": 10700},
    "controller": {"drive_v": 5, "min_on_time_s": 8e-8, "min_off_time_s": 1.2e-7, "max_duty_ratio": 0.98, "rating": {"input_v": 60, "junction_degc": 150}, "thermal": {"junction_to_ambient_k_per_w": 40}}
  },
  "requirement": {
    "input": {"min_v": 18, "max_v": 32}, "output": {"voltage_v": 5, "tolerance_ratio": 0.03}, "load": {"min_a": 0.5, "max_a": 6},
    "ambient": {"min_degc": 0, "max_degc": 60}, "switching_frequency_hz": 500000
  }
}`

func small(t testing.TB) object {
	t.Helper()
	var d object
	require.NoError(t, json.Unmarshal([]byte(smallCheck), &d))
	return d
}

func at(d any, path string) any {
	for token := range strings.SplitSeq(path, "/") {
		switch v := d.(type) {
		case object:
			d = v[token]
		case []any:
			d = v[token[0]-'0']
		}
	}
	return d
}

// findings asks for a check and returns its verdict and findings by rule and place.
func findings(t testing.TB, server string, d object) (string, map[string]object) {
	t.Helper()
	r := send(t, "POST", server+"/v1/rule-checks", encode(t, d))
	require.Equal(t, 200, r.status, "%s", r.body)
	declared(t, "ruleChecks", r)
	answer := r.tree(t).(object)
	m := map[string]object{}
	for _, f := range answer["findings"].([]any) {
		f := f.(object)
		m[f["rule"].(string)+" "+f["pointer"].(string)] = f
	}
	return answer["verdict"].(string), m
}

// ratings of the small stage, each of which some rule of general practice needs.
var ratings = []string{
	"high_side/rating/drain_source_v", "low_side/rating/drain_source_v", "high_side/rating/drain_current_a", "low_side/rating/junction_degc",
	"inductor/rating/saturation_a", "inductor/rating/heating_a", "inductor/rating/winding_degc", "output_capacitors/0/rating/voltage_v",
	"output_capacitors/0/rating/ripple_current_a", "input_capacitors/0/rating/voltage_v", "input_capacitors/0/rating/temperature_degc",
}

func TestAMissingRatingNeverPasses(t *testing.T) {
	server := server(t)
	verdict, whole := findings(t, server, small(t))
	require.Equal(t, "pass", verdict)
	for _, pointer := range ratings {
		t.Run(pointer, func(t *testing.T) {
			d := small(t)
			above, name := pointer[:strings.LastIndexByte(pointer, '/')], pointer[strings.LastIndexByte(pointer, '/')+1:]
			delete(at(d["stage"], above).(object), name)
			verdict, after := findings(t, server, d)
			require.Equal(t, "incomplete", verdict)
			looked := 0
			for key, f := range after {
				if f["pointer"] == "/stage/"+pointer {
					looked++
					require.Equal(t, "not-evaluated", f["verdict"], key)
					require.Contains(t, f["missing"], "/stage/"+pointer)
				}
			}
			require.Positive(t, looked)
			require.Len(t, after, len(whole), "a gap is told, not left out")
		})
	}
}

func TestABetterRatingNeverFails(t *testing.T) {
	server := server(t)
	random := rand.New(rand.NewPCG(7, 7))
	for range 6 {
		d := small(t)
		for _, pointer := range ratings { // first worse, so that something can fail
			above, name := pointer[:strings.LastIndexByte(pointer, '/')], pointer[strings.LastIndexByte(pointer, '/')+1:]
			m := at(d["stage"], above).(object)
			m[name] = m[name].(float64) * (0.5 + random.Float64())
		}
		_, before := findings(t, server, d)
		for _, pointer := range ratings {
			above, name := pointer[:strings.LastIndexByte(pointer, '/')], pointer[strings.LastIndexByte(pointer, '/')+1:]
			m := at(d["stage"], above).(object)
			m[name] = m[name].(float64) * (1 + random.Float64())
		}
		_, after := findings(t, server, d)
		for key, f := range before {
			if f["verdict"] == "pass" {
				require.Equal(t, "pass", after[key]["verdict"], key)
			}
		}
	}
}

func TestChecksAreTheSameOnAnyNumberOfWorkers(t *testing.T) {
	body := encode(t, small(t))
	var first []byte
	for _, workers := range []int{1, 3} {
		s := httptest.NewServer(api.New(api.Options{Service: service.New(service.Options{ContractVersion: contract.Version(), Workers: workers})}))
		r := send(t, "POST", s.URL+"/v1/rule-checks", body)
		s.Close()
		require.Equal(t, 200, r.status)
		if first == nil {
			first = r.body
		}
		require.Equal(t, string(first), string(r.body))
	}
}

// company is a pack that tightens general practice and adds a rule of its own.
const company = `{"id": "company", "title": "House rules", "edition": "3", "provenance": "design office", "extends": "general-practice",
  "rules": [{"id": "inductor-cool", "title": "Cool inductor", "severity": "warning", "scope": ["inductor"], "value": "greatest.inductor_winding_degc", "at_most": 70, "unit": "Cel", "message": "The winding reaches {value} of {limit}.", "basis": "house rule"}],
  "overrides": [{"rule": "general-practice/high-side-voltage", "limit": 0.7, "reason": "long leads"}, {"rule": "gate-voltage", "enabled": false, "reason": "drive is fixed"}]}`

func TestADerivedPackNamesWhatItOverrides(t *testing.T) {
	server, d := server(t), small(t)
	var pack object
	require.NoError(t, json.Unmarshal([]byte(company), &pack))
	d["packs"] = []any{object{"pack": pack}}
	r := send(t, "POST", server+"/v1/rule-checks", encode(t, d))
	require.Equal(t, 200, r.status, "%s", r.body)
	answer := r.tree(t).(object)
	require.Equal(t, "fail", answer["verdict"], "32 V of 45 V is more than 70 %")
	require.Len(t, answer["overrides"], 2)
	require.Equal(t, object{"pack": "company", "target": "general-practice/high-side-voltage", "what": "limit", "from": "0.8", "to": "0.7", "reason": "long leads"}, answer["overrides"].([]any)[0])
	require.Equal(t, "general-practice", answer["packs"].([]any)[0].(object)["extends"])
	_, found := findings(t, server, d)
	require.Equal(t, "fail", found["company/high-side-voltage /stage/high_side/rating/drain_source_v"]["verdict"])
	require.Equal(t, "general-practice/high-side-voltage", found["company/high-side-voltage /stage/high_side/rating/drain_source_v"]["origin"])
	require.NotContains(t, found, "company/gate-voltage /stage/high_side/rating/gate_source_v")
	require.Contains(t, found, "company/inductor-cool /stage/inductor")
}

func TestWaiversHoldUntilTheirDay(t *testing.T) {
	server := server(t)
	ask := func(expires, date string) (string, map[string]object) {
		d := small(t)
		at(d["stage"], "inductor/rating").(object)["saturation_a"] = 7.0
		d["waivers"] = []any{
			object{"rule": "general-practice/inductor-saturation", "pointer": "/stage/inductor/rating/saturation_a", "reason": "tested", "approved_by": "head of design", "expires_on": expires},
			object{"rule": "general-practice/inductor-heating", "pointer": "/stage/inductor/rating/heating_a", "reason": "left over", "approved_by": "head of design", "expires_on": "2030-01-01"},
		}
		d["date"] = date
		return findings(t, server, d)
	}
	verdict, found := ask("2026-06-30", "2026-06-30")
	require.Equal(t, "pass", verdict)
	f := found["general-practice/inductor-saturation /stage/inductor/rating/saturation_a"]
	require.Equal(t, "waived", f["verdict"])
	require.Equal(t, "fail", f["waived_from"])
	require.Equal(t, "head of design", f["waiver"].(object)["approved_by"])
	require.Contains(t, found, "waivers/unused /stage/inductor/rating/heating_a")
	verdict, found = ask("2026-06-30", "2026-07-01")
	require.Equal(t, "fail", verdict)
	require.Contains(t, found, "waivers/expired /stage/inductor/rating/saturation_a")
}

func TestCheckFaultsPointAtFields(t *testing.T) {
	server := server(t)
	pack := func(edit func(rule object)) object {
		rule := object{"id": "r", "title": "t", "severity": "error", "scope": []any{"inductor"}, "value": "greatest.inductor_rms_a", "at_most": "part.rating.heating_a", "unit": "A", "message": "m", "basis": "b"}
		edit(rule)
		return object{"packs": []any{object{"id": "general-practice"}, object{"pack": object{"id": "own", "title": "t", "edition": "1", "provenance": "p", "rules": []any{rule}}}}}
	}
	waiver := func(k, v string) object {
		w := object{"rule": "general-practice/inductor-heating", "pointer": "/stage", "reason": "r", "approved_by": "a", "expires_on": "2030-01-01"}
		w[k] = v
		return object{"date": "2026-01-01", "waivers": []any{w}}
	}
	for name, c := range map[string]struct {
		with    object
		pointer string
	}{
		"unknown-pack":           {object{"packs": []any{object{"id": "nobody"}}}, "/packs/0/id"},
		"pack-twice":             {object{"packs": []any{object{"id": "general-practice"}, object{"id": "general-practice"}}}, "/packs/1"},
		"unknown-name":           {pack(func(r object) { r["value"] = "greatest.inductor_rms" }), "/packs/1/pack/rules/0/value"},
		"wrong-dimension":        {pack(func(r object) { r["at_most"] = "part.rating.winding_degc" }), "/packs/1/pack/rules/0/at_most"},
		"wrong-unit":             {pack(func(r object) { r["unit"] = "furlong" }), "/packs/1/pack/rules/0/unit"},
		"no-limit":               {pack(func(r object) { delete(r, "at_most") }), "/packs/1/pack/rules/0"},
		"not-an-expression":      {pack(func(r object) { r["when"] = "1 +" }), "/packs/1/pack/rules/0/when"},
		"bad-message":            {pack(func(r object) { r["message"] = "{valeu}" }), "/packs/1/pack/rules/0/message"},
		"extends-nothing":        {object{"packs": []any{object{"pack": object{"id": "own", "title": "t", "edition": "1", "provenance": "p", "extends": "nobody"}}}}, "/packs/0/pack/extends"},
		"waiver-without-a-day":   {waiver("expires_on", "2026-02-30"), "/waivers/0/expires_on"},
		"waiver-without-reason":  {waiver("reason", ""), "/waivers/0/reason"},
		"waiver-without-anybody": {waiver("approved_by", ""), "/waivers/0/approved_by"},
		"no-such-day":            {object{"date": "2026-13-01"}, "/date"},
		"limit-on-nothing":       {object{"limits": []any{object{"quantity": "no_such_quantity_v", "max": 1.0}}}, "/limits/0/quantity"},
		"limit-between-nothing":  {object{"limits": []any{object{"quantity": "inductor_peak_a", "max": 1.0, "min": 2.0}}}, "/limits/0/min"},
	} {
		t.Run(name, func(t *testing.T) {
			d := small(t)
			for k, v := range c.with {
				d[k] = v
			}
			r := send(t, "POST", server+"/v1/rule-checks", encode(t, d))
			require.Equal(t, 422, r.status, "%s", r.body)
			declared(t, "ruleChecks", r)
			require.Contains(t, string(r.body), `"pointer":"`+c.pointer+`"`)
		})
	}
	d := small(t)
	d["waivers"] = waiver("rule", "general-practice/inductor-heating")["waivers"]
	r := send(t, "POST", server+"/v1/rule-checks", encode(t, d))
	require.Equal(t, 422, r.status, "a waiver needs a date to be compared with")
	require.Contains(t, string(r.body), `"pointer":"/date"`)
}

func TestLimitsOfTheRequestAreFindings(t *testing.T) {
	d := small(t)
	d["limits"] = []any{object{"quantity": "output_capacitor_rms_a", "max": 1e-3}, object{"quantity": "phase_margin_deg", "min": 45.0}}
	verdict, found := findings(t, server(t), d)
	require.Equal(t, "fail", verdict)
	require.Equal(t, "fail", found["limits/output_capacitor_rms_a.0.max /limits/0"]["verdict"])
	f := found["limits/phase_margin_deg.min /limits/1"]
	require.Equal(t, "not-evaluated", f["verdict"])
	require.Equal(t, []any{"/stage/modulator", "/stage/compensator"}, f["missing"])
}

func TestFindingsInOtherForms(t *testing.T) {
	server, body := server(t), encode(t, small(t))
	_, found := findings(t, server, small(t))
	r := send(t, "POST", server+"/v1/rule-checks", body, "Accept", "application/sarif+json")
	require.Equal(t, 200, r.status)
	require.Equal(t, "application/sarif+json", r.header.Get("Content-Type"))
	log := r.tree(t).(object)
	require.NoError(t, sarifSchema(t).Validate(log))
	require.Equal(t, "2.1.0", log["version"])
	require.Len(t, log["runs"].([]any)[0].(object)["results"], len(found))
	r = send(t, "POST", server+"/v1/rule-checks", body, "Accept", "text/csv")
	require.Equal(t, 200, r.status)
	require.Len(t, strings.Split(strings.TrimSpace(string(r.body)), "\r\n"), len(found)+1)
}

// sarifSchema is the schema that the standard publishes.
func sarifSchema(t *testing.T) *jsonschema.Schema {
	t.Helper()
	raw, err := os.ReadFile("../reference/sarif/sarif-2.1.0-rtm.5.json")
	require.NoError(t, err)
	document, err := jsonschema.UnmarshalJSON(bytes.NewReader(raw))
	require.NoError(t, err)
	c := jsonschema.NewCompiler()
	require.NoError(t, c.AddResource("sarif.json", document))
	s, err := c.Compile("sarif.json")
	require.NoError(t, err)
	return s
}

func TestRulePacksAreServed(t *testing.T) {
	server := server(t)
	r := send(t, "GET", server+"/v1/rule-packs", nil)
	require.Equal(t, 200, r.status)
	declared(t, "listRulePacks", r)
	list := r.tree(t).(object)["packs"].([]any)
	require.Len(t, list, 5)
	for _, p := range list {
		one := send(t, "GET", server+"/v1/rule-packs/"+p.(object)["id"].(string), nil)
		require.Equal(t, 200, one.status)
		declared(t, "getRulePack", one)
		require.Equal(t, p.(object)["title"], one.tree(t).(object)["pack"].(object)["title"])
		again := send(t, "GET", server+"/v1/rule-packs/"+p.(object)["id"].(string), nil, "If-None-Match", one.header.Get("ETag"))
		require.Equal(t, 304, again.status)
	}
	require.Equal(t, 404, send(t, "GET", server+"/v1/rule-packs/nobody", nil).status)
}
