package service

import (
	"bytes"
	"testing"

	v2 "github.com/go-json-experiment/json"
	"github.com/go-json-experiment/json/jsontext"
	"github.com/stretchr/testify/require"
)

// The examples printed in RFC 8785, sections 3.2.2 to 3.2.4, and its appendix B.
func TestCanonicalRFC8785(t *testing.T) {
	cases := []struct{ name, in, out string }{
		{
			"section-3.2.2",
			`{"numbers": [333333333.33333329, 1E30, 4.50, 2e-3, 0.000000000000000000000000001], "string": "\u20ac$\u000F\u000aA'\u0042\u0022\u005c\\\"\/", "literals": [null, true, false]}`,
			`{"literals":[null,true,false],"numbers":[333333333.3333333,1e+30,4.5,0.002,1e-27],"string":"€$\u000f\nA'B\"\\\\\"/"}`,
		},
		{
			"section-3.2.3-order-by-utf-16",
			`{"\u20ac": "Euro Sign", "\r": "Carriage Return", "\ufb33": "Hebrew Letter Dalet With Dagesh", "1": "One", "\ud83d\ude00": "Emoji: Grinning Face", "\u0080": "Control", "\u00f6": "Latin Small Letter O With Diaeresis"}`,
			"{\"\\r\":\"Carriage Return\",\"1\":\"One\",\"\u0080\":\"Control\",\"ö\":\"Latin Small Letter O With Diaeresis\",\"€\":\"Euro Sign\",\"😀\":\"Emoji: Grinning Face\",\"\ufb33\":\"Hebrew Letter Dalet With Dagesh\"}",
		},
		{
			"appendix-b",
			`[-0.0, 5e-324, 1.7976931348623157e308, 9007199254740992, 295147905179352830000, 9.999999999999997e22, 1e23, 999999999999999700000, 0.000001, 333333333.3333332]`,
			`[0,5e-324,1.7976931348623157e+308,9007199254740992,295147905179352830000,9.999999999999997e+22,1e+23,999999999999999700000,0.000001,333333333.3333332]`,
		},
	}
	for _, c := range cases {
		t.Run(c.name, func(t *testing.T) {
			require.Equal(t, c.out, string(AppendCanonical(nil, tree(t, c.in))))
		})
	}
}

func TestResultIDRestsOnMeaningOnly(t *testing.T) {
	e := Engine{Name: "n", Version: "v", ContractVersion: "c", Platform: "p"}
	id := func(op string, e Engine, text string) string {
		got := ResultID(op, e, tree(t, text))
		require.Regexp(t, "^res_[0-9a-f]{64}$", got)
		return got
	}
	base := id("losses", e, `{"a": 1, "b": [2.0, "x"]}`)
	require.Equal(t, base, id("losses", e, "{\"b\":[2e0,\"\\u0078\"],\n\"a\":1.0}"))
	require.NotEqual(t, base, id("losses", e, `{"a": 1, "b": ["x", 2]}`))
	require.NotEqual(t, base, id("steady-state", e, `{"a": 1, "b": [2, "x"]}`))
	e.Platform = "q"
	require.NotEqual(t, base, id("losses", e, `{"a": 1, "b": [2, "x"]}`))
}

func tree(t *testing.T, text string) (v any) {
	t.Helper()
	require.NoError(t, v2.Unmarshal([]byte(text), &v))
	return v
}

// The form of any document is the one that an independent implementation writes.
func FuzzCanonical(f *testing.F) {
	for _, s := range []string{`{"b":1,"a":[1e-7,-0,"\u00e9"]}`, `[]`, `"\ud83d\ude00"`, `{"\ufb33":1,"\ud83d\ude00":2,"\r":3}`, `123456789012345678901`, `[1e21,1e-6,9.99e-7,1.5e300]`, `"\u0000\u001f\u007f\\\""`} {
		f.Add([]byte(s))
	}
	f.Fuzz(func(t *testing.T, text []byte) {
		var v any
		if v2.Unmarshal(text, &v) != nil {
			return
		}
		want := jsontext.Value(bytes.Clone(text))
		require.NoError(t, want.Canonicalize())
		require.Equal(t, string(want), string(AppendCanonical(nil, v)))
	})
}
