package exchange

import (
	"fmt"
	"io/fs"
	"strings"
	"testing"

	v2 "github.com/go-json-experiment/json"
	"github.com/stretchr/testify/require"

	"railproof/openapi"
)

// strict is the parser that quick is held against.
func strict(body []byte) (any, error) {
	var tree any
	err := v2.Unmarshal(body, &tree)
	return tree, err
}

func TestQuickReadsEveryExampleAsTheStrictParserDoes(t *testing.T) {
	n := 0
	err := fs.WalkDir(openapi.Examples(), ".", func(path string, d fs.DirEntry, err error) error {
		if err != nil || !strings.HasSuffix(path, ".json") {
			return err
		}
		n++
		body, err := fs.ReadFile(openapi.Examples(), path)
		require.NoError(t, err)
		want, err := strict(body)
		require.NoError(t, err, path)
		got, ok := quick(body)
		require.True(t, ok, path)
		require.Equal(t, want, got, path)
		return nil
	})
	require.NoError(t, err)
	require.Positive(t, n)
}

var notTaken = []string{
	``, ` `, `{`, `}`, `{"a":1,}`, `{,"a":1}`, `{"a" 1}`, `{"a":1 "b":2}`, `{"a":1,"a":2}`, `{a:1}`, `[1,]`, `[,1]`, `[1 2]`, `[1`, `"`, `"a`, `"\u0041"`, "\"\x01\"", "\"\xff\"",
	`01`, `-`, `+1`, `.5`, `1.`, `1e`, `1e+`, `1e400`, `NaN`, `Infinity`, `tru`, `truefalse`, `nul`, `1 2`, `{} {}`, "\ufeff{}", "\u00a01", `{"a":1}x`,
	strings.Repeat("[", maxDepth+1) + strings.Repeat("]", maxDepth+1),
}

func TestQuickLeavesToTheStrictParserWhatItMust(t *testing.T) {
	for _, text := range notTaken {
		_, ok := quick([]byte(text))
		require.False(t, ok, "%q", text)
	}
	deepest := strings.Repeat("[", maxDepth) + strings.Repeat("]", maxDepth)
	_, ok := quick([]byte(deepest))
	require.True(t, ok)
}

// FuzzQuick: whatever quick takes, the strict parser takes with the same tree and
// without refusing its depth.
func FuzzQuick(f *testing.F) {
	for _, text := range notTaken {
		f.Add([]byte(text))
	}
	for _, text := range []string{`{"a":[1,-0,2.5e-3,{"b":"µ"},null,true,false]}`, ` [ ] `, `{ }`, `-0.0E+2`, `[[],{},[{"a":{}}]]`} {
		f.Add([]byte(text))
	}
	f.Fuzz(func(t *testing.T, body []byte) {
		got, ok := quick(body)
		if !ok {
			return
		}
		want, err := strict(body)
		require.NoError(t, err, "%q", body)
		require.Equal(t, fmt.Sprint(want), fmt.Sprint(got), "%q", body)
		require.Equal(t, want, got, "%q", body)
		_, deep := tooDeep(want, 0)
		require.False(t, deep)
	})
}
