package main

import (
	"path/filepath"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"
)

func TestPicturesThatCannotBeAreBadInput(t *testing.T) {
	const request = "../../openapi/examples/buoy-5v0/losses.json"
	for name, c := range map[string]struct {
		flags []string
		says  string
	}{
		"unknown":        {[]string{"--picture", "pie", "--png", filepath.Join(t.TempDir(), "x.png")}, `no picture "pie"; there are: breakdown, curves, map`},
		"not in answer":  {[]string{"--picture", "map", "--png", filepath.Join(t.TempDir(), "x.png")}, "the answer has nothing that such a picture shows"},
		"narrow":         {[]string{"--width-px", "20", "--svg", filepath.Join(t.TempDir(), "x.svg")}, "accepted: 320 to 2400"},
		"nowhere to be":  {[]string{"--svg", filepath.Join(t.TempDir(), "none", "x.svg")}, "no such file or directory"},
		"point too many": {[]string{"--item", "7", "--svg", filepath.Join(t.TempDir(), "x.svg")}, "the answer has nothing that such a picture shows"},
	} {
		t.Run(name, func(t *testing.T) {
			var out, failed strings.Builder
			code := run(t.Context(), append([]string{"losses", request}, c.flags...), terminal{out: &out, err: &failed, env: func(string) string { return "" }})
			require.Equal(t, exitBadInput, code, failed.String())
			require.Contains(t, failed.String(), c.says)
			require.Empty(t, out.String())
		})
	}
}
