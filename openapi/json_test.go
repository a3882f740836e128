package openapi

import (
	"bytes"
	"encoding/json"
	"flag"
	"os"
	"strconv"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"
	"go.yaml.in/yaml/v3"
)

var update = flag.Bool("update", false, "rewrite openapi.json from openapi.yaml")

// openapi.json says what openapi.yaml says, in the same order.
func TestJSONFormIsFresh(t *testing.T) {
	var document yaml.Node
	require.NoError(t, yaml.Unmarshal(yamlBytes, &document))
	var compact, want bytes.Buffer
	writeJSON(t, &compact, document.Content[0])
	require.NoError(t, json.Indent(&want, compact.Bytes(), "", " "))
	want.WriteByte('\n')
	if *update {
		require.NoError(t, os.WriteFile("openapi.json", want.Bytes(), 0o644))
		return
	}
	require.True(t, bytes.Equal(want.Bytes(), jsonBytes), "openapi.json is stale: go test ./openapi -run TestJSONFormIsFresh -update")
}

func writeJSON(t *testing.T, w *bytes.Buffer, n *yaml.Node) {
	t.Helper()
	switch n.Kind {
	case yaml.MappingNode:
		w.WriteByte('{')
		for i := 0; i < len(n.Content); i += 2 {
			if i > 0 {
				w.WriteByte(',')
			}
			require.NoError(t, encode(w, n.Content[i].Value))
			w.WriteByte(':')
			writeJSON(t, w, n.Content[i+1])
		}
		w.WriteByte('}')
	case yaml.SequenceNode:
		w.WriteByte('[')
		for i, item := range n.Content {
			if i > 0 {
				w.WriteByte(',')
			}
			writeJSON(t, w, item)
		}
		w.WriteByte(']')
	case yaml.ScalarNode:
		switch n.ShortTag() {
		case "!!str":
			require.NoError(t, encode(w, n.Value))
		case "!!int", "!!float":
			v, err := strconv.ParseFloat(n.Value, 64)
			require.NoError(t, err, "line %d", n.Line)
			require.NoError(t, encode(w, v))
		case "!!bool":
			w.WriteString(n.Value)
		default:
			t.Fatalf("line %d: the contract holds a %s", n.Line, n.ShortTag())
		}
	default:
		t.Fatalf("line %d: aliases have no place in the contract", n.Line)
	}
}

func encode(w *bytes.Buffer, v any) error {
	var b strings.Builder
	e := json.NewEncoder(&b)
	e.SetEscapeHTML(false)
	if err := e.Encode(v); err != nil {
		return err
	}
	w.WriteString(strings.TrimSuffix(b.String(), "\n"))
	return nil
}
