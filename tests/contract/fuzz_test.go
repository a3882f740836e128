package contract

import (
	"encoding/json"
	"io/fs"
	"math/rand/v2"
	"net/http"
	"net/http/httptest"
	"os"
	"sort"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/openapi"
)

// answer runs one body through the whole handler, without a socket.
func answer(t testing.TB, h http.Handler, op openapi.Operation, body []byte) *httptest.ResponseRecorder {
	t.Helper()
	r := httptest.NewRequestWithContext(t.Context(), op.Method, op.Path, strings.NewReader(string(body)))
	r.Header.Set("Content-Type", "application/json")
	r.Header.Set("X-Request-Id", "derived") // else a problem's instance differs
	w := httptest.NewRecorder()
	h.ServeHTTP(w, r)
	return w
}

// sound checks what holds for any bytes at all: a status that the contract
// declares, below 500, with a body that it describes.
func sound(t testing.TB, op openapi.Operation, body []byte, w *httptest.ResponseRecorder) {
	t.Helper()
	if w.Code >= 500 {
		keep(t, op, body)
	}
	require.Less(t, w.Code, 500, "body %.2000s\nanswer %.500s", body, w.Body)
	if w.Code == http.StatusOK && strings.HasPrefix(w.Header().Get("Content-Type"), "text/html") {
		return // a report, which has no schema
	}
	var tree any
	require.NoError(t, json.Unmarshal(w.Body.Bytes(), &tree))
	require.Empty(t, contract.ValidateResponse(op.ID, w.Code, tree), "body %.2000s", body)
}

// keep writes a request that must be looked at to a file, and tells where.
func keep(t testing.TB, op openapi.Operation, body []byte) {
	t.Helper()
	f, err := os.CreateTemp("", op.ID+"-*.json")
	require.NoError(t, err)
	_, err = f.Write(body)
	require.NoError(t, err)
	require.NoError(t, f.Close())
	t.Logf("%s %s: %s", op.Method, op.Path, f.Name())
}

// requests are the example requests of the operations that this version has.
func requests(t testing.TB) map[string]openapi.Operation {
	t.Helper()
	found := map[string]openapi.Operation{}
	require.NoError(t, fs.WalkDir(openapi.Examples(), ".", func(file string, d fs.DirEntry, err error) error {
		if err != nil || d.IsDir() {
			return err
		}
		op, known := operationOf(file)
		require.True(t, known, file)
		if !unbuilt[op.ID] {
			text, err := fs.ReadFile(openapi.Examples(), file)
			require.NoError(t, err)
			found[string(fewer(t, text))] = op
		}
		return nil
	}))
	return found
}

// fewer asks for less of what costs most, so that many requests can be sent.
func fewer(t testing.TB, text []byte) []byte {
	t.Helper()
	var request map[string]any
	require.NoError(t, json.Unmarshal(text, &request))
	for _, budget := range []string{"samples", "attribution_samples"} {
		if _, has := request[budget]; has {
			request[budget] = 256.0
		}
	}
	return encode(t, request)
}

// mutant changes, removes, doubles or swaps random leaves of a document; the
// numbers it puts in are those at which checks tend to be forgotten.
func mutant(random *rand.Rand, v any) any {
	switch v := v.(type) {
	case map[string]any:
		names := make([]string, 0, len(v))
		for name := range v {
			names = append(names, name)
		}
		if len(names) == 0 {
			return nil
		}
		sort.Strings(names)
		out := map[string]any{}
		for _, name := range names {
			out[name] = v[name]
		}
		name := names[random.IntN(len(names))]
		switch random.IntN(12) {
		case 0:
			delete(out, name)
		case 1:
			out[name+"x"] = v[name]
		case 2:
			out[name] = v[names[random.IntN(len(names))]]
		default:
			out[name] = mutant(random, v[name])
		}
		return out
	case []any:
		if len(v) == 0 || random.IntN(10) == 0 {
			return append(append([]any{}, v...), v...)
		}
		out := append([]any{}, v...)
		i := random.IntN(len(out))
		out[i] = mutant(random, out[i])
		return out
	case float64:
		switch random.IntN(8) {
		case 0:
			return v * []float64{0, -1, 1e-3, 1e3, 1e-9, 1e9, 2, 0.5}[random.IntN(8)]
		case 1:
			return []float64{0, 1e-300, 1e300, -1e300, 5e-324, 1, -1}[random.IntN(7)]
		case 2:
			return map[string]any{"typ": v, "tol": random.Float64()}
		case 3:
			return map[string]any{"min": v * random.Float64(), "max": v * (1 + random.Float64())}
		case 4:
			return map[string]any{"min": v, "typ": v * 2 * random.Float64(), "group": "lot"}
		}
		return v * (0.2 + 3*random.Float64())
	}
	return []any{nil, true, "x", "", 0.0, []any{}, map[string]any{}}[random.IntN(7)]
}

func TestMutatedRequestsNeverBreakTheServer(t *testing.T) {
	h := handler()
	random := rand.New(rand.NewPCG(20, 26))
	counts := map[int]int{}
	rounds := 20
	if testing.Short() {
		rounds = 4
	}
	examples := requests(t)
	texts := make([]string, 0, len(examples))
	for text := range examples {
		texts = append(texts, text)
	}
	sort.Strings(texts)
	for _, text := range texts {
		op := examples[text]
		var tree any
		require.NoError(t, json.Unmarshal([]byte(text), &tree))
		n := rounds
		switch op.ID {
		case "corners", "reports", "substitutions", "ruleChecks", "bomChecks": // each is hundreds of evaluations at every corner
			n = 1
		}
		for range n {
			changed := tree
			for range 1 + random.IntN(3) {
				changed = mutant(random, changed)
			}
			body := encode(t, changed)
			w := answer(t, h, op, body)
			sound(t, op, body, w)
			again := answer(t, h, op, body)
			if w.Code == http.StatusOK {
				require.Equal(t, w.Body.String(), again.Body.String(), "same request, same bytes")
			}
			counts[w.Code]++
		}
	}
	require.Positive(t, counts[200])
	require.Positive(t, counts[422])
}

// Breaking one leaf by its type gives a refusal that points at it.
func TestOneBrokenLeafIsPointedAt(t *testing.T) {
	h := handler()
	var tree map[string]any
	require.NoError(t, json.Unmarshal(exampleRequest(t, "mast-12v0/steady-state.json"), &tree))
	op, _ := operationOf("steady-state.json")
	count := 0
	eachLeaf(tree, "", func(pointer string, put func(any)) {
		put(nil)
		w := answer(t, h, op, encode(t, tree))
		require.Equal(t, http.StatusUnprocessableEntity, w.Code, pointer)
		require.Contains(t, w.Body.String(), `"pointer":"`+pointer+`"`)
		count++
	})
	require.Greater(t, count, 100)
}

// eachLeaf calls visit for every leaf with a function that replaces it; the leaf
// is restored afterwards.
func eachLeaf(v any, at string, visit func(pointer string, put func(any))) {
	switch v := v.(type) {
	case map[string]any:
		for name, member := range v {
			if isLeaf(member) {
				visit(at+"/"+name, func(x any) { v[name] = x })
				v[name] = member
				continue
			}
			eachLeaf(member, at+"/"+name, visit)
		}
	case []any:
		for i, entry := range v {
			if !isLeaf(entry) {
				eachLeaf(entry, at+"/"+number(float64(i)), visit)
			}
		}
	}
}

func isLeaf(v any) bool {
	switch v.(type) {
	case map[string]any, []any:
		return false
	}
	return true
}

func FuzzAnyBytes(f *testing.F) {
	h := handler()
	for text := range requests(f) {
		f.Add([]byte(text))
	}
	f.Add([]byte(minimal))
	f.Add([]byte(`{"stage":null}`))
	op, _ := operationOf("losses.json")
	f.Fuzz(func(t *testing.T, body []byte) { sound(t, op, body, answer(t, h, op, body)) })
}
