package contract

import (
	"io/fs"
	"path"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/openapi"
)

// badExample ends the name of an example whose stage does not do what it should.
const badExample = "-unstable"

// operations by the file names of the examples.
func operationOf(file string) (openapi.Operation, bool) {
	name := strings.TrimSuffix(strings.TrimSuffix(path.Base(file), ".json"), badExample)
	for _, op := range contract.Operations() {
		if op.Path == "/v1/"+name {
			return op, true
		}
	}
	return openapi.Operation{}, false
}

func TestEveryExampleIsAnsweredAsTheContractSays(t *testing.T) {
	at := server(t)
	ran := 0
	require.NoError(t, fs.WalkDir(openapi.Examples(), ".", func(file string, d fs.DirEntry, err error) error {
		if err != nil || d.IsDir() {
			return err
		}
		op, found := operationOf(file)
		require.True(t, found, "an example of no operation: %s", file)
		if unbuilt[op.ID] {
			return nil
		}
		ran++
		t.Run(file, func(t *testing.T) {
			body, err := fs.ReadFile(openapi.Examples(), file)
			require.NoError(t, err)
			r := send(t, op.Method, at+op.Path, body)
			require.Equal(t, 200, r.status, "%s", r.body)
			declared(t, op.ID, r)
			if r.header.Get("Content-Type") == "text/html" {
				require.Contains(t, string(r.body), "</html>")
			} else if answer := r.tree(t).(map[string]any); answer["grid"] == nil {
				want := "ok"
				if strings.HasSuffix(file, badExample+".json") {
					want = "unstable"
				}
				require.Equal(t, want, answer["status"], "%v", answer["detail"])
			}
			again := send(t, op.Method, at+op.Path, body)
			require.Equal(t, string(r.body), string(again.body), "same request, same bytes")
		})
		return nil
	}))
	require.Positive(t, ran)
}

func TestExamplesOfTheContractItself(t *testing.T) {
	at := server(t)
	for _, op := range contract.Operations() {
		if op.Example == nil || unbuilt[op.ID] {
			continue
		}
		t.Run(op.ID, func(t *testing.T) {
			r := send(t, op.Method, at+op.Path, encode(t, op.Example))
			require.Equal(t, 200, r.status, "%s", r.body)
			declared(t, op.ID, r)
		})
	}
}
