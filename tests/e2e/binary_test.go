// Package e2e runs the built program as its users do.
package e2e

import (
	"bytes"
	"context"
	"errors"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"
)

var program string

func TestMain(m *testing.M) {
	dir, err := os.MkdirTemp("", "railproof")
	if err != nil {
		panic(err)
	}
	program = filepath.Join(dir, "railproof")
	build := exec.CommandContext(context.Background(), "go", "build", "-o", program, "railproof/cmd/railproof")
	build.Stderr = os.Stderr
	if err := build.Run(); err != nil {
		panic(err)
	}
	code := m.Run()
	if err := os.RemoveAll(dir); err != nil {
		panic(err)
	}
	os.Exit(code)
}

// root is the top of the repository, where people stand when they try the README.
const root = "../.."

type run struct {
	code     int
	out, err string
}

func railproof(t *testing.T, input string, args ...string) run {
	t.Helper()
	c := exec.CommandContext(t.Context(), program, args...)
	c.Dir = root
	c.Stdin = strings.NewReader(input)
	var out, stderr bytes.Buffer
	c.Stdout, c.Stderr = &out, &stderr
	err := c.Run()
	code := 0
	if exit, ok := errors.AsType[*exec.ExitError](err); ok {
		code = exit.ExitCode()
	} else {
		require.NoError(t, err)
	}
	return run{code, out.String(), stderr.String()}
}

func example(t *testing.T, name string) string {
	t.Helper()
	b, err := os.ReadFile(filepath.Join(root, "openapi", "examples", name))
	require.NoError(t, err)
	return string(b)
}
