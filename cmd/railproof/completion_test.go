package main

import (
	"bytes"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"
)

func completionScript(t *testing.T, shell string) string {
	t.Helper()
	var out, stderr bytes.Buffer
	code := run(t.Context(), []string{"completion", shell}, terminal{strings.NewReader(""), &out, &stderr, func(string) string { return "" }})
	require.Equal(t, exitFine, code, stderr.String())
	return out.String()
}

func TestCompletionKnowsEverySubcommandAndFlag(t *testing.T) {
	for _, shell := range []string{"bash", "zsh", "fish"} {
		script := completionScript(t, shell)
		for _, c := range completed() {
			require.Contains(t, script, c.name, shell)
			for _, f := range c.flags {
				require.Contains(t, script, f.name, "%s: flag of %s", shell, c.name)
			}
		}
	}
}

func TestCompletionOfAnUnknownShell(t *testing.T) {
	var out, stderr bytes.Buffer
	require.Equal(t, exitBadInput, run(t.Context(), []string{"completion", "tcl"}, terminal{strings.NewReader(""), &out, &stderr, func(string) string { return "" }}))
	require.Contains(t, stderr.String(), "bash, zsh, fish")
}

func TestCompletionInBash(t *testing.T) {
	bash, err := exec.LookPath("bash")
	if err != nil {
		t.Skip("no bash here")
	}
	file := filepath.Join(t.TempDir(), "completion")
	require.NoError(t, os.WriteFile(file, []byte(completionScript(t, "bash")), 0o600))
	complete := func(words ...string) []string {
		t.Helper()
		script := `. "$1"; shift; COMP_WORDS=(railproof "$@"); COMP_CWORD=$#; _railproof; printf '%s\n' "${COMPREPLY[@]}"`
		c := exec.CommandContext(t.Context(), bash, append([]string{"-c", script, "bash", file}, words...)...)
		c.Dir = "../../openapi/examples/buoy-5v0"
		out, err := c.CombinedOutput()
		require.NoError(t, err, string(out))
		return strings.Fields(string(out))
	}
	require.Equal(t, []string{"steady-state"}, complete("st"))
	require.Equal(t, []string{"--table"}, complete("losses", "--t"))
	require.Equal(t, []string{"losses.json"}, complete("losses", "--table", "losse"))
	require.Equal(t, []string{"zsh"}, complete("completion", "z"))
	require.Equal(t, []string{"corners"}, complete("help", "cor"))
	require.Empty(t, complete("losses", "--no-such"))
}

// Shells that are not on every machine only check that they can read their script.
func TestCompletionCanBeRead(t *testing.T) {
	for _, shell := range []string{"zsh", "fish"} {
		t.Run(shell, func(t *testing.T) {
			path, err := exec.LookPath(shell)
			if err != nil {
				t.Skip(shell + " is not installed")
			}
			c := exec.CommandContext(t.Context(), path, "-n")
			c.Stdin = strings.NewReader(completionScript(t, shell))
			out, err := c.CombinedOutput()
			require.NoError(t, err, string(out))
			require.Empty(t, string(out))
		})
	}
}
