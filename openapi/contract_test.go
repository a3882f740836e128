package openapi

import (
	"context"
	"encoding/json"
	"io/fs"
	"net/http"
	"path"
	"strings"
	"testing"

	"github.com/getkin/kin-openapi/openapi3"
	"github.com/stretchr/testify/require"
)

// loadGeneral loads the contract with the general validator.
func loadGeneral(t testing.TB) *openapi3.T {
	t.Helper()
	document, err := openapi3.NewLoader().LoadFromData(yamlBytes)
	require.NoError(t, err)
	return document
}

func TestContractIsValidOpenAPI(t *testing.T) {
	require.NoError(t, loadGeneral(t).Validate(context.Background()))
}

func TestEveryOperation(t *testing.T) {
	seen := map[string]bool{}
	for _, op := range Load().Operations() {
		t.Run(op.ID, func(t *testing.T) {
			require.False(t, seen[op.ID], "an operation of the same name exists")
			seen[op.ID] = true
			require.Contains(t, op.Statuses, 200)
			require.Contains(t, op.Statuses, 500)
			if op.Method == http.MethodPost {
				require.NotEmpty(t, op.Example, "a request without an example")
				require.Subset(t, op.Statuses, []int{400, 406, 413, 415, 422, 429, 503})
				require.Empty(t, Load().ValidateRequest(op.ID, op.Example))
			}
		})
	}
}

// exampleOperations says which operation each example file is for.
var exampleOperations = map[string]string{
	"sizing": "sizing", "steady-state": "steadyState", "losses": "losses", "corners": "corners", "loop-gain": "loopGain", "loop-gain-unstable": "loopGain", "transients": "transients",
	"rule-checks": "ruleChecks", "substitutions": "substitutions", "bom-checks": "bomChecks", "reports": "reports",
}

func eachExample(t *testing.T, do func(t *testing.T, rail, operationID string, tree map[string]any)) {
	t.Helper()
	files, err := fs.Glob(Examples(), "*/*.json")
	require.NoError(t, err)
	require.GreaterOrEqual(t, len(files), len(exampleOperations)+20)
	for _, name := range files {
		t.Run(name, func(t *testing.T) {
			b, err := fs.ReadFile(Examples(), name)
			require.NoError(t, err)
			var tree map[string]any
			require.NoError(t, json.Unmarshal(b, &tree))
			id := exampleOperations[strings.TrimSuffix(path.Base(name), ".json")]
			require.NotEmpty(t, id, "an example of no operation")
			do(t, path.Dir(name), id, tree)
		})
	}
}

func TestExamplesSatisfyTheContract(t *testing.T) {
	eachExample(t, func(t *testing.T, _, id string, tree map[string]any) {
		require.Empty(t, Load().ValidateRequest(id, tree))
	})
}

// One rail is one set of parts: its stage is the same in every example, but for the
// compensator of the one that shows what is wrong with it.
func TestExamplesOfOneRailShareItsStage(t *testing.T) {
	stages := map[string]any{}
	eachExample(t, func(t *testing.T, rail, _ string, tree map[string]any) {
		stage, ok := tree["stage"]
		if rails, bound := tree["rails"].([]any); bound {
			stage, ok = rails[0].(map[string]any)["stage"]
		}
		if !ok {
			return
		}
		require.Equal(t, rail, stage.(map[string]any)["name"])
		if strings.HasSuffix(t.Name(), "unstable.json") {
			stage.(map[string]any)["compensator"] = stages[rail].(map[string]any)["compensator"]
		}
		if before := stages[rail]; before != nil {
			require.Equal(t, before, stage)
		}
		stages[rail] = stage
	})
}
