package tests

import (
	"encoding/json"
	"os"
	"os/exec"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"
)

// Every module that is imported has its line in the page on dependencies.
func TestEveryModuleIsExplained(t *testing.T) {
	out, err := exec.CommandContext(t.Context(), "go", "mod", "edit", "-json", "../go.mod").Output()
	require.NoError(t, err)
	var file struct {
		Require []struct {
			Path     string
			Indirect bool
		}
	}
	require.NoError(t, json.Unmarshal(out, &file))
	page, err := os.ReadFile("../api/docs/dependencies.md")
	require.NoError(t, err)
	direct := 0
	for _, m := range file.Require {
		if m.Indirect {
			continue
		}
		direct++
		named := strings.Contains(string(page), m.Path)
		for _, family := range []string{"github.com/riverqueue/river/", "go.opentelemetry.io/otel/", "go.opentelemetry.io/contrib/"} { // one line, by their last names
			if last, of := strings.CutPrefix(m.Path, family); of {
				named = named || strings.Contains(string(page), last)
			}
		}
		require.True(t, named, m.Path)
	}
	require.Greater(t, direct, 10)
}
