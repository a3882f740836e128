package contract

import (
	"encoding/json"
	"fmt"
	"net/http"
	"net/http/httptest"
	"os"
	"slices"
	"strconv"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/openapi"
)

// dear are operations of which one answer is hundreds of evaluations at every corner.
var dear = []string{"corners", "reports", "substitutions", "ruleChecks", "bomChecks"}

// budgets are the members that say how much is computed, and what they may say here.
var budgets = map[string]float64{"samples": 256, "attribution_samples": 256, "waveform_points": 600}

// hold keeps a document within the budgets.
func hold(v any) {
	switch v := v.(type) {
	case map[string]any:
		for name, member := range v {
			if n, is := member.(float64); is && budgets[name] > 0 {
				v[name] = min(n, budgets[name])
			}
			hold(member)
		}
	case []any:
		for _, entry := range v {
			hold(entry)
		}
	}
}

// A thousand requests written from the contract's schemas: from nothing, or an example
// with changes that the contract allows. Every one is answered by a declared status
// below 500 with a body that the contract describes, the same bytes twice, and none is
// refused for its form.
func TestDerivedRequestsAreAnswered(t *testing.T) {
	h := handler()
	g := newGrammar(seed(t, 1))
	counts := map[string]int{}
	for _, text := range sortedRequests(t) {
		for n := range roundsOf(t, text.op, 60) {
			root := g.body(text.op)
			var tree any
			if n%4 == 3 {
				tree = g.value(root, 0)
			} else {
				tree = copied(t, text.body)
				for range 1 + g.random.IntN(3) {
					g.vary(g.sites(root, tree, "", func(x any) { tree = x }))
				}
			}
			hold(tree)
			body := encode(t, tree)
			require.Empty(t, contract.ValidateRequest(text.op.ID, copied(t, body)), "%s takes what was written from it: %.600s", text.op.ID, body)
			w := twice(t, h, text.op, body)
			require.NotContains(t, w.Body.String(), "/docs/problems/schema", "%.2000s", body)
			require.NotEqual(t, http.StatusBadRequest, w.Code, "%.2000s", body)
			counts[fmt.Sprint(w.Code)]++
			counts["in all"]++
		}
	}
	t.Log(counts)
	require.Greater(t, counts["200"], counts["in all"]/4)
	require.Positive(t, counts["422"])
}

// Requests of which one keyword of the contract is broken in one place are refused
// there.
func TestBrokenRequestsArePointedAt(t *testing.T) {
	h := handler()
	g := newGrammar(seed(t, 2))
	broken := map[string]int{}
	for _, text := range sortedRequests(t) {
		for range roundsOf(t, text.op, 60) {
			root := g.body(text.op)
			tree := copied(t, text.body)
			list := g.sites(root, tree, "", func(x any) { tree = x })
			p := list[g.random.IntN(len(list))]
			keyword := g.spoil(p)
			if keyword == "" {
				continue
			}
			broken[keyword]++
			body := encode(t, tree)
			w := twice(t, h, text.op, body)
			require.Equal(t, http.StatusUnprocessableEntity, w.Code, "%s at %s: %.500s", keyword, p.pointer, w.Body)
			var problem struct {
				Type   string
				Errors []struct{ Pointer string }
			}
			require.NoError(t, json.Unmarshal(w.Body.Bytes(), &problem))
			require.Contains(t, problem.Type, "/docs/problems/schema")
			require.True(t, slices.ContainsFunc(problem.Errors, func(e struct{ Pointer string }) bool {
				return e.Pointer == p.pointer || (keyword == "required" || keyword == "additionalProperties") && strings.HasPrefix(e.Pointer, p.pointer+"/")
			}), "%s at %s: %.500s", keyword, p.pointer, w.Body)
		}
	}
	t.Log(broken)
	require.GreaterOrEqual(t, len(broken), 8, "many keywords: %v", broken)
}

// Addresses and their parameters, written from the contract and broken.
func TestDerivedAddressesAreAnswered(t *testing.T) {
	at, _ := jobServer(t)
	g := newGrammar(seed(t, 3))
	for path, item := range g.document["paths"].(map[string]any) {
		o, is := item.(map[string]any)["get"].(map[string]any)
		if !is {
			continue
		}
		id := o["operationId"].(string)
		parameters, _ := o["parameters"].([]any)
		for n := range 12 {
			url, broken := path, false
			var query []string
			for _, p := range parameters {
				parameter := g.schema(p)
				name := parameter["name"].(string)
				value := fmt.Sprint(g.value(parameter["schema"], 0))
				switch parameter["in"] {
				case "path":
					url = strings.Replace(url, "{"+name+"}", value, 1)
				case "query":
					if name == "cursor" { // the server's own words; any other is refused
						continue
					}
					if n%3 == 1 {
						value, broken = "~", true
					}
					query = append(query, name+"="+value)
				}
			}
			if n%3 == 2 {
				query, broken = append(query, "not_in_the_contract=1"), true
			}
			if query != nil {
				url += "?" + strings.Join(query, "&")
			}
			r := send(t, http.MethodGet, at+url, nil)
			require.Less(t, r.status, 500, url)
			declared(t, id, r)
			if broken {
				require.Equal(t, http.StatusBadRequest, r.status, "%s: %.300s", url, r.body)
			} else {
				require.Contains(t, []int{200, 404}, r.status, "%s: %.300s", url, r.body)
			}
		}
	}
}

type written struct {
	op   openapi.Operation
	body []byte
}

// sortedRequests are the example requests in a fixed order.
func sortedRequests(t testing.TB) []written {
	var list []written
	for body, op := range requests(t) {
		list = append(list, written{op, []byte(body)})
	}
	slices.SortFunc(list, func(a, b written) int { return strings.Compare(string(a.body), string(b.body)) })
	return list
}

// seed is where the numbers of a test begin, moved by RAILPROOF_SEED to look elsewhere.
func seed(t testing.TB, own uint64) uint64 {
	t.Helper()
	given := os.Getenv("RAILPROOF_SEED")
	if given == "" {
		return own
	}
	moved, err := strconv.ParseUint(given, 10, 32)
	require.NoError(t, err)
	return own + 10*moved
}

// roundsOf is how many requests are made of one example.
func roundsOf(t testing.TB, op openapi.Operation, usual int) int {
	t.Helper()
	if testing.Short() {
		usual /= 6
	}
	if slices.Contains(dear, op.ID) {
		usual = 1 + usual/60
	}
	return usual
}

func copied(t testing.TB, body []byte) (tree any) {
	t.Helper()
	require.NoError(t, json.Unmarshal(body, &tree))
	return tree
}

// twice sends a request twice: the answer is sound, and the same bytes.
func twice(t testing.TB, h http.Handler, op openapi.Operation, body []byte) *httptest.ResponseRecorder {
	t.Helper()
	w := answer(t, h, op, body)
	sound(t, op, body, w)
	again := answer(t, h, op, body)
	require.Equal(t, w.Code, again.Code)
	require.True(t, w.Body.String() == again.Body.String(), "same request, same bytes: %.2000s", body)
	return w
}
