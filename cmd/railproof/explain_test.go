package main

import (
	"bytes"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"
)

func TestExplainFlag(t *testing.T) {
	answer := func(flags ...string) string {
		var out, stderr bytes.Buffer
		code := run(t.Context(), append(append([]string{"losses"}, flags...), "../../openapi/examples/buoy-5v0/losses.json"),
			terminal{strings.NewReader(""), &out, &stderr, func(string) string { return "" }})
		require.Equal(t, exitFine, code, "%s", &stderr)
		return out.String()
	}
	require.NotContains(t, answer(), `"explanation"`)
	require.Contains(t, answer("--explain"), `"explanation":[{"quantity":"high_side/conduction","formula":"P = R Irms²"`)
	require.Contains(t, answer("--explain", "--table"), "how the figures follow")
}
