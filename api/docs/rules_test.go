package docs

import (
	"strings"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/calc/rules"
	"railproof/service/packs"
)

func rulesPage(t *testing.T) string {
	t.Helper()
	for _, p := range Pages() {
		if p.Name == "rules" {
			return p.Text
		}
	}
	t.Fatal("no page about rules")
	return ""
}

// The pack on the page loads and does what the page says.
func TestPackOfTheRulesPageLoads(t *testing.T) {
	_, after, found := strings.Cut(rulesPage(t), "```json\n")
	require.True(t, found)
	text, _, found := strings.Cut(after, "```")
	require.True(t, found)
	parsed, err := packs.Parse([]byte(text))
	require.NoError(t, err)
	library, err := packs.Builtin().With(parsed)
	require.NoError(t, err)
	e, found := library.Pack("buoy-house-rules")
	require.True(t, found)
	base, _ := packs.Builtin().Pack("general-practice")
	require.Len(t, e.Pack.Rules, len(base.Pack.Rules), "one off, one more")
	require.Len(t, e.Pack.Overrides, 2)
}

// Every name on the page is one that expressions may use.
func TestNamesOnTheRulesPage(t *testing.T) {
	page := rulesPage(t)
	known := map[string]bool{}
	for s := rules.Scope(0); s < rules.ScopeCount; s++ {
		for _, n := range rules.Vocabulary(s) {
			known[n.Key] = true
			root, _, _ := strings.Cut(n.Key, ".")
			require.Contains(t, page, "`"+root+".", n.Key)
		}
	}
	for _, name := range []string{"stage.rectifier", "stage.phase_count", "stage.has_loop", "stage.has_feedback", "part.kind", "part.count", "part.assumed"} {
		require.Contains(t, page, name)
		require.True(t, known[name], name)
	}
}
