package e2e

import (
	"encoding/csv"
	"encoding/json"
	"strings"
	"testing"
	"unicode/utf8"

	"github.com/stretchr/testify/require"
)

// few is the example with few samples and other members put in.
func few(t *testing.T, members map[string]any) string {
	t.Helper()
	var tree map[string]any
	require.NoError(t, json.Unmarshal([]byte(example(t, "buoy-5v0/corners.json")), &tree))
	tree["samples"], tree["methods"] = 200, []string{"extreme-value", "root-sum-square", "monte-carlo"}
	for name, v := range members {
		tree[name] = v
	}
	text, err := json.Marshal(tree)
	require.NoError(t, err)
	return string(text)
}

func limits(quantity, side string, bound float64) map[string]any {
	return map[string]any{"limits": []any{map[string]any{"quantity": quantity, side: bound}}}
}

func TestExitCodesOfCorners(t *testing.T) {
	for name, c := range map[string]struct {
		members map[string]any
		code    int
	}{
		"limits-kept":     {nil, 0},
		"limit-broken":    {limits("inductor_peak_a", "max", 5), 1},
		"unknown-limit":   {limits("hum_v", "max", 5), 2},
		"no-limit-at-all": {map[string]any{"limits": []any{}}, 0},
	} {
		t.Run(name, func(t *testing.T) {
			r := railproof(t, few(t, c.members), "corners", "-")
			require.Equal(t, c.code, r.code, "%.500s", r.err)
		})
	}
}

// The table tells, for every limited quantity, what the issue of a review is: the
// figures, the verdict, where it is worst and which parts make it so.
func TestTableOfCorners(t *testing.T) {
	r := railproof(t, few(t, nil), "corners", "--table", "-")
	require.Equal(t, 0, r.code, r.err)
	for line := range strings.Lines(r.out) {
		require.LessOrEqual(t, utf8.RuneCountInString(strings.TrimRight(line, "\n")), 100, line)
	}
	for _, words := range []string{"worst case, pass", "nearest to its limit: ", "output_ripple_pp_v", "nominal", "worst found", "root-sum-sq", "quantile", "≤ 30.0 mV", "inductor/inductance_h", "units pass everything", "clopper-pearson"} {
		require.Contains(t, r.out, words)
	}
	r = railproof(t, few(t, nil), "corners", "--csv", "-")
	require.Equal(t, 0, r.code, r.err)
	rows, err := csv.NewReader(strings.NewReader(r.out)).ReadAll()
	require.NoError(t, err)
	require.Len(t, rows, 10)
}
