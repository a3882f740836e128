// Package golden holds answers that callers may have stored, so that a proof of last
// year can be computed again. Every figure must come out the same to 1e-9 relative;
// only a commit that says why may write the files anew, with
//
//	go test ./tests/golden -update
package golden

import (
	"bytes"
	"compress/gzip"
	"encoding/json"
	"flag"
	"fmt"
	"io"
	"maps"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/api/exchange"
)

var update = flag.Bool("update", false, "write the answers of now")

// held are the operations whose answers are held.
var held = []string{"sizing", "steadyState", "losses", "corners", "loopGain", "ruleChecks", "bomChecks"}

const (
	tolerance = 1e-9  // relative: what platforms may differ by
	smallest  = 1e-15 // differences below it are noise of rounding
)

// passing are fields that are not part of what was computed, or measure the rounding
// itself.
var passing = []string{"engine", "result_id", "energy_balance_ratio"}

func TestAnswersOfThePast(t *testing.T) {
	count := 0
	eachAnswer(t, func(t *testing.T, e *example, a *exchange.Answer) {
		if !slices.Contains(held, e.operation) || strings.HasSuffix(e.name, "-unstable.json") {
			return
		}
		count++
		var got any
		require.NoError(t, json.Unmarshal(a.Body, &got))
		stored := filepath.Join("testdata", strings.ReplaceAll(e.name, "/", "-")+".gz")
		if *update {
			write(t, stored, e.request, a.Body)
		}
		pair := read(t, stored)
		require.JSONEq(t, string(pair.Request), string(e.request), "the request has changed: hold the old one, or say why")
		var want any
		require.NoError(t, json.Unmarshal(pair.Answer, &want))
		if differences := compare("", want, got, nil); len(differences) > 0 {
			t.Fatalf("%d figures differ, such as\n%s", len(differences), strings.Join(differences[:min(10, len(differences))], "\n"))
		}
	})
	require.Equal(t, 3*len(held), count)
}

type pair struct {
	Request json.RawMessage `json:"request"`
	Answer  json.RawMessage `json:"answer"`
}

func write(t *testing.T, file string, request, answer []byte) {
	t.Helper()
	text, err := json.Marshal(pair{request, answer})
	require.NoError(t, err)
	var b bytes.Buffer
	z, err := gzip.NewWriterLevel(&b, gzip.BestCompression)
	require.NoError(t, err)
	_, err = z.Write(text)
	require.NoError(t, err)
	require.NoError(t, z.Close())
	require.NoError(t, os.MkdirAll(filepath.Dir(file), 0o755))
	require.NoError(t, os.WriteFile(file, b.Bytes(), 0o644))
}

func read(t *testing.T, file string) (p pair) {
	t.Helper()
	f, err := os.Open(file)
	require.NoError(t, err)
	defer f.Close()
	z, err := gzip.NewReader(f)
	require.NoError(t, err)
	text, err := io.ReadAll(z)
	require.NoError(t, err)
	require.NoError(t, json.Unmarshal(text, &p))
	return p
}

// compare lists where two documents differ. New fields are no difference: answers may
// grow.
func compare(at string, want, got any, found []string) []string {
	differ := func() []string { return append(found, fmt.Sprintf("%s: was %v, is %v", at, want, got)) }
	switch w := want.(type) {
	case map[string]any:
		g, ok := got.(map[string]any)
		if !ok {
			return differ()
		}
		for _, name := range slices.Sorted(maps.Keys(w)) {
			if slices.Contains(passing, name) {
				continue
			}
			if _, has := g[name]; !has {
				found = append(found, at+"/"+name+": is gone")
				continue
			}
			found = compare(at+"/"+name, w[name], g[name], found)
		}
		return found
	case []any:
		g, ok := got.([]any)
		if !ok || len(g) != len(w) {
			return differ()
		}
		for i := range w {
			found = compare(fmt.Sprintf("%s/%d", at, i), w[i], g[i], found)
		}
		return found
	case float64:
		g, ok := got.(float64)
		if !ok || math.Abs(g-w) > tolerance*max(math.Abs(w), math.Abs(g))+smallest {
			return differ()
		}
		return found
	}
	if want != got {
		return differ()
	}
	return found
}

func TestComparisonSeesWhatDiffers(t *testing.T) {
	tree := func(text string) (v any) {
		require.NoError(t, json.Unmarshal([]byte(text), &v))
		return v
	}
	base := `{"a": {"b": [1, 2.5]}, "s": "x", "engine": 1}`
	require.Empty(t, compare("", tree(base), tree(`{"a": {"b": [1, 2.500000000001]}, "s": "x", "engine": 2, "new": 1}`), nil))
	for _, other := range []string{
		`{"a": {"b": [1, 2.50000001]}, "s": "x"}`, `{"a": {"b": [1]}, "s": "x"}`, `{"a": {}, "s": "x"}`, `{"a": {"b": [1, 2.5]}, "s": "y"}`, `{"a": {"b": [1, "2.5"]}, "s": "x"}`, `{"a": [], "s": "x"}`,
	} {
		require.Len(t, compare("", tree(base), tree(other), nil), 1, other)
	}
}
