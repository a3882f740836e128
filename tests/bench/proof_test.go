package bench

import (
	"encoding/json"
	"fmt"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"
)

func document(b testing.TB, name string) map[string]any {
	b.Helper()
	var d map[string]any
	require.NoError(b, json.Unmarshal(example(b, name), &d))
	return d
}

func encode(b testing.TB, v any) []byte {
	b.Helper()
	body, err := json.Marshal(v)
	require.NoError(b, err)
	return body
}

// BenchmarkRuleChecks is one check of the reference rail by general practice, worst
// case, loop and load step included.
func BenchmarkRuleChecks(b *testing.B) {
	h, d, n := handler(), document(b, "buoy-5v0/rule-checks.json"), 0
	for b.Loop() {
		n++
		d["requirement"].(map[string]any)["name"] = fmt.Sprint("run ", n)
		serve(b, h, "/v1/rule-checks", encode(b, d))
	}
}

// BenchmarkSubstitutions100 is a hundred different inductors for the reference rail;
// promised within 5 s on two cores.
func BenchmarkSubstitutions100(b *testing.B) {
	h, d, n := handler(), document(b, "buoy-5v0/substitutions.json"), 0
	first := encode(b, d["replacements"].([]any)[0])
	for b.Loop() {
		n++
		list := make([]any, 0, 100)
		for k := range 100 {
			var r map[string]any
			require.NoError(b, json.Unmarshal(first, &r))
			r["id"] = fmt.Sprint("candidate ", k)
			r["inductor"].(map[string]any)["inductance_h"] = map[string]any{"typ": 6.8e-6 * (1 + 1e-3*float64(k) + 1e-6*float64(n)), "tol": 0.2}
			list = append(list, r)
		}
		d["replacements"] = list
		serve(b, h, "/v1/substitutions", encode(b, d))
	}
}

// BenchmarkBom5000 is a bill of material of 5,000 lines against 40 rails; promised
// within 5 s.
func BenchmarkBom5000(b *testing.B) {
	h, d := handler(), document(b, "buoy-3v3/bom-checks.json")
	rail := encode(b, d["rails"].([]any)[0])
	rails := make([]any, 0, 40)
	var text strings.Builder
	text.WriteString("Designator;Value;Part\n")
	for k := range 40 {
		var r map[string]any
		require.NoError(b, json.Unmarshal(rail, &r))
		r["name"] = fmt.Sprint("rail ", k)
		next := 0
		for _, binding := range r["bindings"].([]any) {
			list := binding.(map[string]any)["designators"].([]any)
			for i := range list {
				list[i] = fmt.Sprintf("%s%d%03d", list[i].(string)[:1], 1+k, 8*next)
				next++
			}
		}
		r["designator_ranges"] = []any{map[string]any{"from": fmt.Sprintf("C%d000", 1+k), "to": fmt.Sprintf("C%d999", 1+k)}}
		rails = append(rails, r)
	}
	for k := range 5000 {
		fmt.Fprintf(&text, "C%d,R%d;4u7 10%% 50 V;INVENTED-%d\n", 1000+8*k, 1000+8*k, k)
	}
	d["rails"] = rails
	n := 0
	for b.Loop() {
		n++
		d["bom"] = map[string]any{"csv": map[string]any{"text": text.String() + fmt.Sprintf("X%d;;\n", n), "columns": map[string]any{"designators": "Designator", "value": "Value", "part_number": "Part"}}}
		serve(b, h, "/v1/bom-checks", encode(b, d))
	}
}
