package packs

import (
	"errors"
	"strings"
	"sync"
	"testing"
	"time"

	"railproof/calc/quantity"
	"railproof/calc/rules"
	"railproof/calc/stage"

	"github.com/stretchr/testify/require"
)

// document returns a pack of one rule in which the given lines replace those of
// the same key.
func document(lines ...string) string {
	keep := []string{
		"id: heat", "title: Heat", "severity: error", "scope: [inductor]", "value: greatest.inductor_rms_a",
		"at_most: part.rating.heating_a", "unit: A", `message: "{value}"`, "basis: test",
	}
	for _, line := range lines {
		name, _, _ := strings.Cut(line, ":")
		replaced := false
		for i := range keep {
			if strings.HasPrefix(keep[i], name+":") {
				keep[i], replaced = line, true
			}
		}
		if !replaced {
			keep = append(keep, line)
		}
	}
	return "id: house\ntitle: House rules\nedition: \"1\"\nprovenance: test\nrules:\n  - " + strings.Join(keep, "\n    ") + "\n"
}

func faults(t *testing.T, text string) []Fault {
	t.Helper()
	p, err := Parse([]byte(text))
	if err == nil {
		_, err = Builtin().With(p)
	}
	var invalid *InvalidError
	require.True(t, errors.As(err, &invalid), "err = %v", err)
	require.NotEmpty(t, invalid.Faults)
	return invalid.Faults
}

func TestLoadingRefuses(t *testing.T) {
	deep := strings.Repeat("(", 60) + "1" + strings.Repeat(")", 60)
	cases := map[string]struct {
		text, pointer, detail string
	}{
		"name/unknown":               {document("value: greatest.inductor_rmz_a"), "/rules/0/value", "did you mean greatest.inductor_rms_a?"},
		"name/of-another-scope":      {document("value: part.rating.drain_current_a"), "/rules/0/value", "not a name here"},
		"name/in-has":                {document("when: has(part.rating.heatng_a)"), "/rules/0/when", "did you mean part.rating.heating_a?"},
		"name/in-needs":              {document("needs: [part.rating.heat]"), "/rules/0/needs/0", "not a name here"},
		"name/parameter-unknown":     {document("at_most: parameter.room * part.rating.heating_a"), "/rules/0/at_most", "not a name here"},
		"unit/value-against-unit":    {document("unit: V"), "/rules/0/value", "yields A where V is wanted"},
		"unit/limit-against-unit":    {document("at_most: part.rating.winding_degc"), "/rules/0/at_most", "degrees Celsius"},
		"unit/sum":                   {document("value: greatest.inductor_rms_a + stage.switching_frequency_hz"), "/rules/0/value", "A against Hz"},
		"unit/comparison":            {document("when: greatest.inductor_rms_a > requirement.input.max_v"), "/rules/0/when", "A against V"},
		"unit/product":               {document("value: greatest.inductor_rms_a * greatest.inductor_rms_a"), "/rules/0/value", "A^2"},
		"unit/celsius-product":       {document("value: greatest.inductor_winding_degc * greatest.inductor_rms_a"), "/rules/0/value", "bare number"},
		"unit/unknown":               {document("unit: mA"), "/rules/0/unit", "not a unit"},
		"unit/internal":              {document("unit: any"), "/rules/0/unit", "not a unit"},
		"type/value-is-a-condition":  {document("value: greatest.inductor_rms_a > 1"), "/rules/0/value", "yes or no"},
		"type/condition-is-a-number": {document("when: greatest.inductor_rms_a"), "/rules/0/when", "where yes or no is wanted"},
		"type/word-and-number":       {document("when: stage.rectifier > 1"), "/rules/0/when", ""},
		"word/sum":                   {document(`when: stage.rectifier + stage.rectifier == "x"`), "/rules/0/when", "cannot be added"},
		"word/order":                 {document(`when: stage.rectifier > "a"`), "/rules/0/when", "has no order"},
		"word/never":                 {document(`when: stage.rectifier == "dioed"`), "/rules/0/when", "never \"dioed\""},
		"syntax":                     {document("value: greatest.inductor_rms_a +"), "/rules/0/value", "Syntax error"},
		"function/of-strings":        {document(`when: stage.rectifier.matches("d.*")`), "/rules/0/when", "not a function of rules"},
		"function/unknown":           {document("value: sin(greatest.inductor_rms_a)"), "/rules/0/value", "sin"},
		"function/macro":             {document("when: \"[1].all(x, x > 0)\""), "/rules/0/when", ""},
		"expression/list":            {document("when: \"1 in [1]\""), "/rules/0/when", ""},
		"expression/empty":           {document(`value: ""`), "/rules/0/value", "empty"},
		"expression/too-long":        {document("value: greatest.inductor_rms_a" + strings.Repeat(" + greatest.inductor_rms_a", 90)), "/rules/0/value", ""},
		"expression/too-deep":        {document("value: " + deep), "/rules/0/value", ""},
		"rule/no-limit":              {strings.Replace(document(), "    at_most: part.rating.heating_a\n", "", 1), "/rules/0", "exactly one"},
		"rule/two-limits":            {document("at_least: 1"), "/rules/0", "exactly one"},
		"rule/severity":              {document("severity: fatal"), "/rules/0/severity", "none of"},
		"rule/scope":                 {document("scope: [resistor]"), "/rules/0/scope/0", "not a scope"},
		"rule/no-scope":              {document("scope: []"), "/rules/0/scope", "at least one"},
		"rule/identifier":            {document("id: Heat 1"), "/rules/0/id", "identifier"},
		"rule/message":               {document(`message: "{valu}"`), "/rules/0/message", "{valu}"},
		"rule/no-basis":              {document(`basis: ""`), "/rules/0/basis", "must be given"},
		"rule/unknown-field":         {document("limit: 3"), "/rules/0/limit", "unknown field"},
		"rule/twice":                 {document() + strings.SplitN(document(), "rules:\n", 2)[1], "/rules/1/id", "there already"},
		"pack/id-taken":              {strings.Replace(document(), "id: house", "id: general-practice", 1), "/id", "already"},
		"pack/no-edition":            {strings.Replace(document(), `edition: "1"`, `edition: ""`, 1), "/edition", "must be given"},
		"pack/extends-unknown":       {"id: house\ntitle: a\nedition: b\nprovenance: c\nextends: nobody\n", "/extends", "no pack nobody"},
		"pack/overrides-nothing":     {document() + "overrides: [{rule: heat, limit: 1, reason: x}]\n", "/overrides", "extends"},
		"yaml/anchor":                {"id: &a house\n", "/id", "anchors"},
		"yaml/alias":                 {"id: house\ntitle: *a\n", "", ""},
		"yaml/duplicate":             {"id: a\nid: b\n", "/id", "twice"},
		"yaml/infinity":              {document("at_most: .inf"), "/rules/0/at_most", "no decimal number"},
		"yaml/octal":                 {document("at_most: 0o17"), "/rules/0/at_most", "no decimal number"},
		"yaml/date":                  {"id: a\nedition: 2030-01-01\n", "/edition", "quotes"},
		"yaml/syntax":                {"id: [\n", "", "not YAML"},
		"yaml/empty":                 {"", "", "empty"},
		"yaml/list":                  {"- 1\n", "", "a list does not fit"},
		"yaml/deep":                  {strings.Repeat("- ", 40) + "1\n", "", "nested"},
		"json/duplicate":             {`{"id":"a","id":"b"}`, "/id", ""},
		"json/unknown-field":         {`{"id":"a","colour":"b"}`, "/colour", "unknown field"},
		"json/type":                  {`{"id":7}`, "/id", "a number does not fit"},
		"json/limit-type":            {`{"rules":[{"at_most":[1]}]}`, "/rules/0/at_most", "a list does not fit"},
		"json/syntax":                {`{"id":`, "/id", "not JSON"},
		"size":                       {strings.Repeat("#", maxDocument+1), "", "longer than"},
		"parameter/name":             {document() + "parameters: {Room: {value: 1, least: 0, greatest: 2, meaning: m}}\n", "/parameters/Room", "lower-case"},
		"parameter/out-of-range":     {document() + "parameters: {room: {value: 3, least: 0, greatest: 2, meaning: m}}\n", "/parameters/room/value", "between"},
	}
	for name, c := range cases {
		t.Run(name, func(t *testing.T) {
			list := faults(t, c.text)
			for _, f := range list {
				if (c.pointer == "" || f.Pointer == c.pointer) && strings.Contains(f.Detail, c.detail) {
					return
				}
			}
			t.Errorf("faults %+v, want one at %q that says %q", list, c.pointer, c.detail)
		})
	}
}

func TestFaultsNameTheLine(t *testing.T) {
	for _, f := range faults(t, document("value: greatest.nothing")) {
		if f.Pointer == "/rules/0/value" {
			require.Equal(t, 10, f.Line)
			require.Contains(t, (&InvalidError{Pack: "house", Faults: []Fault{f}}).Error(), "line 10: /rules/0/value")
			return
		}
	}
	t.Error("no fault at the value")
}

func TestYAMLAndJSONSayTheSame(t *testing.T) {
	fromYAML := mustParse(t, document("at_most: 7"))
	fromJSON := mustParse(t, `{"id":"house","title":"House rules","edition":"1","provenance":"test","rules":[{"id":"heat","title":"Heat","severity":"error",
		"scope":["inductor"],"value":"greatest.inductor_rms_a","at_most":7,"unit":"A","message":"{value}","basis":"test"}]}`)
	require.Equal(t, fromYAML.Document, fromJSON.Document)
}

func TestExpressionsCompute(t *testing.T) {
	c := fullCase(stage.Synchronous)
	value := func(text, unit string) rules.Finding {
		return verdictOf(t, check(t, c, document("value: '"+text+"'", "at_most: 1000000000", "unit: "+unit)), "house/heat")
	}
	for text, want := range map[string]float64{
		"2 + 3 * 4":                      14,
		"min(3, 2)":                      2,
		"max(1, 2, 3)":                   3,
		"abs(-2)":                        2,
		"sqrt(2 * 8.0)":                  4,
		"linear(85, 70, 0.5, 110, 0.3)":  0.425,
		"linear(20, 70, 0.5, 110, 0.3)":  0.5,
		"linear(120, 70, 0.5, 110, 0.3)": 0.3,
		"stage.phase_count == 1 ? 5 : 6": 5,
		"greatest.inductor_rms_a / part.rating.heating_a": 6.1 / 9,
	} {
		if strings.Contains(text, "phase_count") {
			c.Stage.PhaseCount = 1
		}
		require.InDelta(t, want, value(text, `"1"`).Value, 1e-12, text)
	}
	c.Stage.Inductor.Inductance, c.Stage.OutputCapacitors[0].Capacitance = 1e-5, 1e-5
	resonance := check(t, c, document("scope: [output_capacitors/*]", "value: 1 / (6.283185307179586 * sqrt(stage.inductor.inductance_h * part.capacitance_f))", "at_most: stage.switching_frequency_hz", "unit: Hz"))
	require.InDelta(t, 15915.494309, verdictOf(t, resonance, "house/heat").Value, 1e-5)
	require.InDelta(t, 55.0, value("greatest.inductor_winding_degc - 25", "Cel").Value, 1e-12)
	require.InDelta(t, 45.0, value("part.rating.winding_degc - greatest.inductor_winding_degc", "K").Value, 1e-12)
}

func TestPresenceShortCircuits(t *testing.T) {
	c := fullCase(stage.Synchronous)
	text := document("when: has(requirement.targets.life_s) && requirement.targets.life_s > 0")
	require.Equal(t, rules.Pass, verdictOf(t, check(t, c, text), "house/heat").Verdict)
	c.Requirement.Targets.Life = unknown
	require.Empty(t, check(t, c, text).Findings, "the rule does not apply, and nothing is missing")
	text = document("when: requirement.targets.life_s > 0")
	f := verdictOf(t, check(t, c, text), "house/heat")
	require.Equal(t, rules.NotEvaluated, f.Verdict)
	require.Equal(t, []string{"/requirement/targets/life_s"}, f.Missing)
}

func TestDivisionByZeroIsNoPass(t *testing.T) {
	c := fullCase(stage.Synchronous)
	setGreatest(c, quantity.InductorRMS, 0)
	c.Stage.Inductor.Rating.Heating = 0
	f := verdictOf(t, check(t, c, document("value: greatest.inductor_rms_a / part.rating.heating_a", "at_most: 1", `unit: "1"`)), "house/heat")
	require.Equal(t, rules.NotEvaluated, f.Verdict, f.Detail)
}

const derived = `
id: harbour-practice
title: Harbour practice
edition: "3"
provenance: in-house
extends: general-practice
overrides:
  - {rule: inductor-heating, limit: 0.8 * part.rating.heating_a, reason: warm hull}
  - {rule: inductor-ripple-low, severity: warning, reason: noise}
  - {rule: general-practice/gain-margin, enabled: false, reason: measured instead}
rules:
  - {id: rail-input, title: Rail input, severity: note, scope: [stage], value: requirement.input.max_v, at_most: 36, unit: V, message: "{value} V", basis: bus specification}
`

func TestDerivedPack(t *testing.T) {
	c := fullCase(stage.Synchronous)
	setGreatest(c, quantity.InductorRMS, 7.5)
	require.Equal(t, rules.Pass, verdictOf(t, builtinReport(c, "general-practice"), "general-practice/inductor-heating").Verdict)
	r := check(t, c, derived)
	f := verdictOf(t, r, "harbour-practice/inductor-heating")
	require.Equal(t, rules.Fail, f.Verdict)
	require.InDelta(t, 7.2, f.Limit, 1e-12)
	require.Equal(t, "general-practice/inductor-heating", f.Origin)
	require.Contains(t, f.Basis, "warm hull")
	require.Equal(t, "3", f.Edition)
	require.Equal(t, rules.Warning, verdictOf(t, r, "harbour-practice/inductor-ripple-low").Severity)
	require.Equal(t, rules.Pass, verdictOf(t, r, "harbour-practice/rail-input").Verdict)
	for _, f := range r.Findings {
		require.NotEqual(t, "harbour-practice/gain-margin", f.Rule)
	}
	require.Equal(t, []rules.Override{
		{Pack: "harbour-practice", Target: "general-practice/inductor-heating", What: "limit", From: "part.rating.heating_a", To: "0.8 * part.rating.heating_a", Reason: "warm hull"},
		{Pack: "harbour-practice", Target: "general-practice/inductor-ripple-low", What: "severity", From: "note", To: "warning", Reason: "noise"},
		{Pack: "harbour-practice", Target: "general-practice/gain-margin", What: "enabled", From: "true", To: "false", Reason: "measured instead"},
	}, r.Overrides)
}

func TestDerivedOfDerived(t *testing.T) {
	l, err := Builtin().With(mustParse(t, derived), mustParse(t, `
id: mast-practice
title: Mast practice
edition: "1"
provenance: in-house
extends: harbour-practice
overrides: [{rule: inductor-heating, limit: 0.7 * part.rating.heating_a, reason: sun}]
`))
	require.NoError(t, err)
	e, _ := l.Pack("mast-practice")
	require.Len(t, e.Pack.Overrides, 4, "what every pack of the chain changed")
	for _, r := range e.Pack.Rules {
		if r.ID == "mast-practice/inductor-heating" {
			require.Equal(t, "general-practice/inductor-heating", r.Origin)
			return
		}
	}
	t.Error("the inherited rule is gone")
}

func TestDerivedPackRefuses(t *testing.T) {
	head := "id: house\ntitle: a\nedition: b\nprovenance: c\nextends: navsea-sd-18-rectifiers\noverrides:\n"
	for name, c := range map[string]struct{ line, pointer, detail string }{
		"unknown-rule":        {"  - {rule: nothing, limit: 1, reason: x}", "/overrides/0/rule", "not a rule of"},
		"unknown-parameter":   {"  - {parameter: nothing, value: 1, reason: x}", "/overrides/0/parameter", "not a parameter"},
		"parameter-range":     {"  - {parameter: quality_level, value: 4, reason: x}", "/overrides/0/value", "between"},
		"parameter-no-value":  {"  - {parameter: quality_level, reason: x}", "/overrides/0", "takes a value"},
		"no-reason":           {"  - {rule: reverse-voltage, limit: 1}", "/overrides/0/reason", "must be given"},
		"no-change":           {"  - {rule: reverse-voltage, enabled: true, reason: x}", "/overrides/0", "changes nothing"},
		"limit-unit":          {"  - {rule: reverse-voltage, limit: part.rating.reverse_v, reason: x}", "/overrides/0/limit", "where a ratio is wanted"},
		"limit-name":          {"  - {rule: reverse-voltage, limit: part.rating.revers_v, reason: x}", "/overrides/0/limit", "did you mean part.rating.reverse_v?"},
		"severity":            {"  - {rule: reverse-voltage, severity: bad, reason: x}", "/overrides/0/severity", "none of"},
		"neither":             {"  - {reason: x}", "/overrides/0", "either a rule or a parameter"},
		"value-on-a-rule":     {"  - {rule: reverse-voltage, value: 1, reason: x}", "/overrides/0/value", "belongs to a parameter"},
		"parameter-redefined": {"  - {parameter: quality_level, value: 1, reason: x}\nparameters: {quality_level: {value: 1, least: 1, greatest: 2, meaning: m}}", "/parameters/quality_level", "override"},
	} {
		t.Run(name, func(t *testing.T) {
			for _, f := range faults(t, head+c.line+"\n") {
				if f.Pointer == c.pointer && strings.Contains(f.Detail, c.detail) {
					return
				}
			}
			t.Errorf("faults %+v, want one at %q that says %q", faults(t, head+c.line+"\n"), c.pointer, c.detail)
		})
	}
}

func TestExtensionsAreBounded(t *testing.T) {
	l := Builtin()
	base := "general-practice"
	var err error
	for i := range maxExtensions + 1 {
		id := "pack-" + string(rune('a'+i))
		l, err = l.With(mustParse(t, "id: "+id+"\ntitle: a\nedition: b\nprovenance: c\nextends: "+base+"\n"))
		base = id
		if err != nil {
			require.Equal(t, maxExtensions, i)
			return
		}
	}
	t.Error("the chain has no end")
}

func TestWithLeavesTheLibraryAlone(t *testing.T) {
	before := len(Builtin().All())
	_, err := Builtin().With(mustParse(t, derived))
	require.NoError(t, err)
	require.Len(t, Builtin().All(), before)
}

func TestPacksAreShared(t *testing.T) {
	var wait sync.WaitGroup
	want := builtinReport(fullCase(stage.Synchronous), "general-practice")
	for range 8 {
		wait.Add(1)
		go func() {
			defer wait.Done()
			for range 5 {
				got := builtinReport(fullCase(stage.Synchronous), "general-practice")
				if len(got.Findings) != len(want.Findings) || got.Verdict != want.Verdict {
					t.Errorf("another outcome in parallel: %d findings, %s", len(got.Findings), got.Verdict)
				}
			}
		}()
	}
	wait.Wait()
}

// The greatest pack that may be loaded must not take long to load.
func TestLoadingIsBounded(t *testing.T) {
	var b strings.Builder
	b.WriteString("id: house\ntitle: a\nedition: b\nprovenance: c\nrules:\n")
	rule := strings.SplitN(document(), "rules:\n", 2)[1]
	for i := range maxRules {
		b.WriteString(strings.Replace(rule, "id: heat", "id: heat-"+strings.Repeat("x", i%9)+string(rune('a'+i%26))+string(rune('a'+i/26)), 1))
	}
	began := time.Now()
	p := mustParse(t, b.String())
	_, err := Builtin().With(p)
	require.NoError(t, err)
	require.Less(t, time.Since(began), 10*time.Second)
}
