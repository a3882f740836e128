package contract

import (
	"encoding/json"
	"io/fs"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/api/exchange"
	"railproof/openapi"
	"railproof/service"
)

// The text of every example's answer is the one that encoding/json writes.
func TestAnswersAreWrittenAsTheStandardLibraryDoes(t *testing.T) {
	x := exchange.New(contract, service.New(service.Options{ContractVersion: contract.Version()}))
	ran := 0
	require.NoError(t, fs.WalkDir(openapi.Examples(), ".", func(file string, d fs.DirEntry, err error) error {
		if err != nil || d.IsDir() {
			return err
		}
		op, _ := operationOf(file)
		if !x.Computes(op.ID) || op.ID == "reports" { // a report is a page, not JSON
			return nil
		}
		ran++
		body, err := fs.ReadFile(openapi.Examples(), file)
		require.NoError(t, err)
		a, problem := x.Do(t.Context(), op.ID, body)
		require.Nil(t, problem, file)
		want, err := json.Marshal(a.Value)
		require.NoError(t, err)
		require.Equal(t, string(want)+"\n", string(a.Body), file)
		return nil
	}))
	require.Positive(t, ran)
}
