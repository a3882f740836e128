package e2e

import (
	"encoding/json"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"
)

func TestExitCodes(t *testing.T) {
	losses := example(t, "buoy-5v0/losses.json")
	changed := func(was, is string) string {
		require.Contains(t, losses, was)
		return strings.ReplaceAll(losses, was, is)
	}
	cases := []struct {
		name  string
		input string
		args  []string
		code  int
	}{
		{"fine", losses, []string{"losses", "-"}, 0},
		{"does-not-work", changed(`"input_v": 24,`, `"input_v": 5.01,`), []string{"losses", "-"}, 1},
		{"infeasible", `{"requirement": {"input": {"min_v": 5.1, "max_v": 5.5}, "output": {"voltage_v": 5}, "load": {"max_a": 50}, "ambient": {"min_degc": 0, "max_degc": 85}, "switching_frequency_hz": 2e6}}`, []string{"size", "-"}, 1},
		{"syntax", "{", []string{"losses", "-"}, 2},
		{"schema", `{"stage": {}}`, []string{"losses", "-"}, 2},
		{"physics", changed(`"regulate_to_v": 5`, `"regulate_to_v": 50`), []string{"losses", "-"}, 2},
		{"unstable", example(t, "buoy-5v0/loop-gain-unstable.json"), []string{"loop", "-"}, 1},
		{"loop", example(t, "buoy-3v3/loop-gain.json"), []string{"loop", "-"}, 0},
		{"transient", example(t, "mast-12v0/transients.json"), []string{"transient", "-"}, 0},
		{"run-too-long", strings.Replace(example(t, "buoy-5v0/transients.json"), `"duration_s": 0.0005`, `"duration_s": 1`, 1), []string{"transient", "-"}, 2},
		{"flag-after-the-file", losses, []string{"losses", "-", "--csv=false"}, 0},
		{"no-such-file", "", []string{"losses", "nowhere.json"}, 2},
		{"no-file", "", []string{"losses"}, 2},
		{"unknown-flag", "", []string{"losses", "--frobnicate", "-"}, 2},
		{"unknown-subcommand", "", []string{"frobnicate"}, 2},
		{"no-subcommand", "", nil, 2},
		{"no-such-form", example(t, "buoy-5v0/sizing.json"), []string{"size", "--csv", "-"}, 2},
		{"address-taken-by-nobody", "", []string{"serve", "--address", "256.0.0.1:1"}, 2},
		{"help", "", []string{"help"}, 0},
		{"version", "", []string{"version"}, 0},
	}
	for _, c := range cases {
		t.Run(c.name, func(t *testing.T) {
			r := railproof(t, c.input, c.args...)
			require.Equal(t, c.code, r.code, "out %.300s\nerr %.600s", r.out, r.err)
			switch {
			case c.code == 2:
				require.Empty(t, r.out)
				require.NotEmpty(t, r.err)
			case slices.Contains(c.args, "-"):
				require.True(t, json.Valid([]byte(r.out)))
				require.Empty(t, r.err)
			}
		})
	}
}

func TestEverySubcommandHasHelpWithARealExample(t *testing.T) {
	overview := railproof(t, "", "help")
	require.Equal(t, 0, overview.code)
	found := 0
	for line := range strings.Lines(overview.out) {
		name, _, _ := strings.Cut(strings.TrimSpace(line), " ")
		if !strings.HasPrefix(line, "  ") || name == "" {
			continue
		}
		help := railproof(t, "", "help", name)
		if help.code == 2 {
			continue // a continued line of the exit codes
		}
		found++
		_, after, has := strings.Cut(help.out, "example:\n  railproof ")
		require.True(t, has, name)
		args := strings.Fields(strings.SplitN(after, "\n", 2)[0])
		if args[0] == "serve" || args[0] == "healthy" {
			continue
		}
		if i := slices.IndexFunc(args, func(a string) bool { return strings.HasPrefix(a, ">") }); i >= 0 {
			args = args[:i] // for the shell
		}
		written := ""
		if i := slices.Index(args, "-o"); i >= 0 {
			written = filepath.Join(t.TempDir(), args[i+1])
			args[i+1] = written
		}
		r := railproof(t, "", args...)
		require.Equal(t, 0, r.code, "%v: %s", args, r.err)
		if written != "" {
			require.FileExists(t, written)
			continue
		}
		require.NotEmpty(t, r.out)
	}
	require.GreaterOrEqual(t, found, 5)
}
