package sarif

import (
	"bytes"
	"encoding/json"
	"math"
	"os"
	"strings"
	"testing"

	"railproof/calc/rules"

	"github.com/santhosh-tekuri/jsonschema/v6"
	"github.com/stretchr/testify/require"
)

func schema(t *testing.T) *jsonschema.Schema {
	t.Helper()
	raw, err := os.ReadFile("../../tests/reference/sarif/sarif-2.1.0-rtm.5.json")
	require.NoError(t, err)
	doc, err := jsonschema.UnmarshalJSON(bytes.NewReader(raw))
	require.NoError(t, err)
	c := jsonschema.NewCompiler()
	c.AssertFormat()
	require.NoError(t, c.AddResource("sarif.json", doc))
	s, err := c.Compile("sarif.json")
	require.NoError(t, err)
	return s
}

func report() *rules.Report {
	waiver := &rules.Waiver{Rule: "p/c", Reason: "measured on the bench", Approver: "A. Harbour", Expires: rules.Date{Year: 2030, Month: 5, Day: 1}}
	nan := math.NaN()
	f := func(rule, pointer string, s rules.Severity, v rules.Verdict) rules.Finding {
		return rules.Finding{
			Rule: rule, Title: "Title of " + rule, Severity: s, Pointer: pointer, Verdict: v, Value: 3, Limit: 2, Unit: "A", Margin: -0.5, ValueLow: nan, ValueHigh: nan,
			Detail: "Detail of " + rule, Basis: "common practice", Pack: "p", Edition: "1", Provenance: "practice", Corners: []int{4},
		}
	}
	waived := f("p/c", "/stage/inductor", rules.Error, rules.Waived)
	waived.WaivedFrom, waived.Waiver = rules.Fail, waiver
	open := f("p/d", "/stage/inductor/rating/saturation_a", rules.Error, rules.NotEvaluated)
	open.Value, open.Limit, open.Margin, open.Missing = 3, nan, nan, []string{"/stage/inductor/rating/saturation_a"}
	banded := f("p/e", "/stage", rules.Note, rules.Fail)
	banded.ValueLow, banded.ValueHigh, banded.WithinBand = 1, 5, true
	return &rules.Report{
		Verdict:       rules.Failed,
		Findings:      []rules.Finding{f("p/a", "/stage/high_side/rating/drain_source_v", rules.Error, rules.Fail), f("p/a", "/stage/high_side", rules.Error, rules.Pass), f("p/b", "/stage/inductor", rules.Warning, rules.Fail), waived, open, banded},
		Overrides:     []rules.Override{{Pack: "p", Target: "q/x", What: "limit", From: "1", To: "2", Reason: "why"}},
		NotApplicable: []string{"p/z"},
	}
}

const input = `{
  "stage": {
    "high_side": {"rating": {"drain_source_v": 40}},
    "inductor": {"inductance_h": 1e-5}
  }
}
`

func options(t *testing.T) Options {
	places, err := Locate([]byte(input))
	require.NoError(t, err)
	return Options{ToolVersion: "1.2.3", InputURI: "rails/buoy-5v0.json", Places: places, Corner: func(i int) string { return strings.Repeat("x", i) }}
}

func TestLogsAreValid(t *testing.T) {
	s := schema(t)
	for name, c := range map[string]struct {
		r *rules.Report
		o Options
	}{
		"full":         {report(), options(t)},
		"no-input":     {report(), Options{}},
		"no-findings":  {&rules.Report{}, Options{InformationURI: "https://rails.example/docs"}},
		"only-pointer": {report(), Options{InputURI: "a%20b.json"}},
	} {
		t.Run(name, func(t *testing.T) {
			out, err := Write(c.r, c.o)
			require.NoError(t, err)
			doc, err := jsonschema.UnmarshalJSON(bytes.NewReader(out))
			require.NoError(t, err)
			require.NoError(t, s.Validate(doc))
			again, err := Write(c.r, c.o)
			require.NoError(t, err)
			require.Equal(t, out, again, "same report, same bytes")
		})
	}
}

// The validator must be able to refuse, or the test above says nothing.
func TestTheSchemaRefuses(t *testing.T) {
	s := schema(t)
	out, err := Write(report(), options(t))
	require.NoError(t, err)
	for from, to := range map[string]string{`"kind": "open"`: `"kind": "maybe"`, `"version": "2.1.0"`: `"version": "2.2.0"`, `"startLine": 3`: `"startLine": 0`, `"ruleIndex": 0`: `"ruleIndex": -2`} {
		require.Contains(t, string(out), from)
		doc, err := jsonschema.UnmarshalJSON(strings.NewReader(strings.Replace(string(out), from, to, 1)))
		require.NoError(t, err)
		require.Error(t, s.Validate(doc), to)
	}
}

func TestResults(t *testing.T) {
	out, err := Write(report(), options(t))
	require.NoError(t, err)
	var l log
	require.NoError(t, json.Unmarshal(out, &l))
	r := l.Runs[0]
	require.Len(t, r.Tool.Driver.Rules, 5, "a rule stands once")
	kinds := make([]string, 0, len(r.Results))
	for _, x := range r.Results {
		kinds = append(kinds, x.Kind+"/"+x.Level)
		require.Equal(t, x.RuleID, r.Tool.Driver.Rules[x.RuleIndex].ID)
	}
	require.Equal(t, []string{"fail/error", "pass/none", "fail/warning", "fail/error", "open/none", "fail/note"}, kinds)
	require.Equal(t, []suppression{{"external", "accepted", "measured on the bench"}}, r.Results[3].Suppressions)
	require.Equal(t, "2030-05-01", r.Results[3].Properties.WaivedTill)
	require.Equal(t, "practice", r.Tool.Driver.Rules[0].Properties.Provenance)
	require.Equal(t, []string{"xxxx"}, r.Results[0].Properties.Corners)
	at := r.Results[0].Locations[0]
	require.Equal(t, "/stage/high_side/rating/drain_source_v", at.Logical[0].FullyQualifiedName)
	require.Equal(t, &region{3, 48}, at.Physical.Region)
	require.Equal(t, &region{4, 17}, r.Results[4].Locations[0].Physical.Region, "a rating that is not there is shown at its part")
	require.Equal(t, "fail", r.Properties.Verdict)
	require.Nil(t, r.Results[4].Properties.Limit)
}

func TestPlaces(t *testing.T) {
	places, err := Locate([]byte("{\"a\":[1,\n  {\"µ𝄞\" : 2, \"b/c~d\": [ ]}],\r\n\"e\":{\"f\":null}}"))
	require.NoError(t, err)
	require.Equal(t, Places{"": {1, 1}, "/a": {1, 6}, "/a/0": {1, 7}, "/a/1": {2, 3}, "/a/1/µ𝄞": {2, 12}, "/a/1/b~1c~0d": {2, 24}, "/e": {3, 5}, "/e/f": {3, 10}}, places)
	at, ok := places.Find("/a/1/x/y")
	require.True(t, ok)
	require.Equal(t, Place{2, 3}, at)
	_, ok = Places(nil).Find("/a")
	require.False(t, ok)
	for _, bad := range []string{`{"a":`, `{"a":1,"a":2}`, `[1 2]`} {
		_, err := Locate([]byte(bad))
		require.Error(t, err, bad)
	}
}

// Any text is located or refused; every place that is told lies in the text.
func FuzzLocate(f *testing.F) {
	for _, text := range []string{`{"a": [1, {"b": "\u00e9"}], "c~/": null}`, "[\n1,\n2]", "{", "", "\xff", `{"a":1,"a":2}`, "{}{}"} {
		f.Add([]byte(text))
	}
	f.Fuzz(func(t *testing.T, raw []byte) {
		places, err := Locate(raw)
		if err != nil {
			return
		}
		lines := bytes.Split(raw, []byte("\n"))
		for pointer, at := range places {
			if at.Line < 1 || at.Line > len(lines) || at.Column < 1 || at.Column > len(lines[at.Line-1])+1 {
				t.Fatalf("%q at %+v", pointer, at)
			}
		}
	})
}
