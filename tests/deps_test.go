// Package tests keeps the rules that hold between packages.
package tests

import (
	"bytes"
	"encoding/json"
	"os/exec"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"
)

// layers says which of our packages may import which. "a < b" means that b may
// import a and what a may import; a name stands for the package and all below it.
// Imports that no line allows are forbidden.
const layers = `
# the whole: cmd -> api -> service -> calc; openapi is data, loader and validator
calc < service < api/wire < api/render < api/exchange
openapi < api/exchange
api/docs, api/exchange, openapi, service < api < cmd
calc, service, openapi, api < tests

# inside calc, from the tools to the questions
calc/numeric, calc/linalg, calc/quantity, calc/preferred, calc/sampling, calc/magnetics < calc/parts
calc/parts, calc/spread < calc/stage
calc/numeric, calc/linalg < calc/switched, calc/thermal, calc/statespace
calc/parts, calc/switched, calc/thermal, calc/stage < calc/losses < calc/evaluate
calc/numeric < calc/magnetics, calc/quantity, calc/spread, calc/sampling, calc/preferred
calc/evaluate, calc/statespace < calc/loop < calc/transient
calc/evaluate, calc/sampling < calc/corners
calc/loop, calc/transient, calc/corners, calc/preferred < calc/sizing
calc/sizing < calc/rules, calc/caution
`

// bans forbid what lies outside of our own packages: the packages that are bound,
// what they may not import, and why.
var bans = []struct {
	within, without string // "without" is exempt; empty: nothing is
	what            []string
	why             string
	tests           bool // test files are bound too
}{
	{"calc", "calc/internal", []string{"net", "net/http", "os", "time", "log", "log/slog", "context", "encoding/json", "io", "bufio"}, "physics is pure: no input, no clock, no shape on a wire", false},
	{"", "api", []string{"github.com/labstack/echo/v4"}, "the router is a detail of the transport", false},
	{"api/wire", "", []string{"net/http", "github.com/labstack/echo/v4"}, "the command line uses the same shapes", false},
	{"api/exchange", "", []string{"net/http", "github.com/labstack/echo/v4"}, "the command line uses the same exchange", false},
	{"api/render", "", []string{"net/http", "github.com/labstack/echo/v4"}, "the command line writes the same tables", false},
	{"service", "", []string{"net/http", "github.com/labstack/echo/v4"}, "a use case knows no transport", false},
	{"", "openapi", []string{"github.com/getkin/kin-openapi"}, "one package judges documents by the contract", true},
	{"", "service", []string{"github.com/google/cel-go", "github.com/riverqueue/river"}, "rule expressions and jobs stand behind our own interfaces", false},
	{"", "-", []string{"github.com/stretchr/testify", "pgregory.net/rapid"}, "assertions belong to tests", false},
	{"", "-", []string{"railproof/cmd"}, "nothing imports the program", true},
}

// listed is what go list tells of a package.
type listed struct {
	ImportPath                         string
	Imports, TestImports, XTestImports []string
}

func packages(t *testing.T) []listed {
	t.Helper()
	c := exec.CommandContext(t.Context(), "go", "list", "-json=ImportPath,Imports,TestImports,XTestImports", "railproof/...")
	out, err := c.Output()
	require.NoError(t, err)
	var all []listed
	for d := json.NewDecoder(bytes.NewReader(out)); d.More(); {
		var p listed
		require.NoError(t, d.Decode(&p))
		all = append(all, p)
	}
	require.Greater(t, len(all), 20)
	return all
}

func own(path string) string { return strings.TrimPrefix(path, "railproof/") }

// inside reports whether a package is the named one or below it.
func inside(path, name string) bool {
	return name == "" || path == name || strings.HasPrefix(path, name+"/")
}

func TestBans(t *testing.T) {
	for _, p := range packages(t) {
		path := own(p.ImportPath)
		for _, ban := range bans {
			if !inside(path, ban.within) || ban.without != "" && inside(path, ban.without) {
				continue
			}
			imports := p.Imports
			if ban.tests {
				imports = append(append(append([]string{}, imports...), p.TestImports...), p.XTestImports...)
			}
			for _, i := range imports {
				for _, what := range ban.what {
					if i == what || strings.Contains(what, ".") && strings.HasPrefix(i, what+"/") || what == "railproof/cmd" && strings.HasPrefix(i, what) {
						t.Errorf("%s imports %s: %s", path, i, ban.why)
					}
				}
			}
		}
	}
}

// allowed returns, for every name of the layers, the names it may import.
func allowed(t *testing.T) map[string]map[string]bool {
	t.Helper()
	may := map[string]map[string]bool{}
	for line := range strings.Lines(layers) {
		line, _, _ = strings.Cut(strings.TrimSpace(line), "#")
		if line == "" {
			continue
		}
		var before []string
		for _, group := range strings.Split(line, "<") {
			var names []string
			for _, name := range strings.Split(group, ",") {
				name = strings.TrimSpace(name)
				names = append(names, name)
				if may[name] == nil {
					may[name] = map[string]bool{}
				}
				for _, b := range before {
					may[name][b] = true
				}
			}
			before = append(before, names...)
		}
	}
	for grew := true; grew; { // what may be imported brings what it may import
		grew = false
		for _, targets := range may {
			for target := range targets {
				for further := range may[target] {
					if !targets[further] {
						targets[further], grew = true, true
					}
				}
			}
		}
	}
	for name, targets := range may {
		require.False(t, targets[name], "%s stands below itself", name)
	}
	return may
}

func TestImportsPointOneWay(t *testing.T) {
	may := allowed(t)
	for _, p := range packages(t) {
		from := layer(may, own(p.ImportPath))
		require.NotEmpty(t, from, "%s stands in no layer", p.ImportPath)
		for _, i := range p.Imports {
			if !strings.HasPrefix(i, "railproof/") || inside(own(i), "calc/internal") {
				continue
			}
			to := layer(may, own(i))
			if from != to && !permits(may, from, to) {
				t.Errorf("%s imports %s: no layer allows it", own(p.ImportPath), own(i))
			}
		}
	}
}

// layer returns the most specific name that a package stands under.
func layer(may map[string]map[string]bool, path string) string {
	found := ""
	for name := range may {
		if inside(path, name) && len(name) > len(found) {
			found = name
		}
	}
	return found
}

// permits reports whether one layer may import another, or what encloses it.
func permits(may map[string]map[string]bool, from, to string) bool {
	for name := range may[from] {
		if to == name || inside(to, name) && !inside(from, name) {
			return true
		}
	}
	return false
}
