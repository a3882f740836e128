package golden

import (
	"context"
	"encoding/json"
	"io/fs"
	"path"
	"strings"
	"sync"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/api/exchange"
	"railproof/openapi"
	"railproof/service"
)

// An example is a request of the contract's examples and its answer, computed when a
// test first asks for it.
type example struct {
	name      string // "buoy-5v0/losses.json"
	operation string
	request   []byte
	answer    func() (*exchange.Answer, *exchange.Problem)
}

// examples are all whose answer is JSON.
var examples = sync.OnceValue(func() []example {
	contract := openapi.Load()
	x := exchange.New(contract, service.New(service.Options{ContractVersion: contract.Version()}))
	operations := map[string]string{}
	for _, op := range contract.Operations() {
		if x.Computes(op.ID) && op.ID != "reports" { // a report is a page
			operations[path.Base(op.Path)] = op.ID
		}
	}
	files, err := fs.Glob(openapi.Examples(), "*/*.json")
	if err != nil {
		panic(err)
	}
	var list []example
	for _, name := range files {
		id := operations[strings.TrimSuffix(strings.TrimSuffix(path.Base(name), ".json"), "-unstable")]
		if id == "" {
			continue
		}
		request := smaller(name)
		list = append(list, example{name, id, request, sync.OnceValues(func() (*exchange.Answer, *exchange.Problem) {
			return x.Do(context.Background(), id, request)
		})})
	}
	return list
})

// smaller is an example with fewer samples: the figures are the same kind.
func smaller(name string) []byte {
	text, err := fs.ReadFile(openapi.Examples(), name)
	var tree map[string]any
	if err == nil {
		err = json.Unmarshal(text, &tree)
	}
	if err != nil {
		panic(err)
	}
	if _, has := tree["samples"]; has {
		tree["samples"] = 2000
	}
	if text, err = json.Marshal(tree); err != nil {
		panic(err)
	}
	return text
}

// eachAnswer runs a test on the answer of every example.
func eachAnswer(t *testing.T, test func(t *testing.T, e *example, a *exchange.Answer)) {
	t.Helper()
	for _, e := range examples() {
		t.Run(e.name, func(t *testing.T) {
			a, problem := e.answer()
			require.Nil(t, problem)
			test(t, &e, a)
		})
	}
}
