package main

import (
	"strings"
	"testing"
	"unicode/utf8"

	"github.com/stretchr/testify/require"
)

func TestHelpFitsATerminalAndGivesOneExample(t *testing.T) {
	for _, c := range commands() {
		var out strings.Builder
		require.Equal(t, exitFine, run(t.Context(), []string{"help", c.name}, terminal{out: &out, err: &out, env: func(string) string { return "" }}))
		require.Equal(t, 1, strings.Count(out.String(), "\nexample:\n  railproof "+c.name), c.name)
		for _, flag := range strings.Split(out.String(), "\n  --") {
			require.LessOrEqual(t, strings.Count(flag, "(default"), 1, "%s: --%s", c.name, flag)
		}
		for line := range strings.Lines(out.String()) {
			require.LessOrEqual(t, utf8.RuneCountInString(strings.TrimRight(line, "\n")), helpWidth, "%s: %s", c.name, line)
		}
	}
}
