package contract

import (
	"encoding/json"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/api"
	"railproof/service"
)

// unbuilt are the operations of the contract that this version does not have; the
// list only shrinks.
var unbuilt = map[string]bool{}

func TestRoutesAndContractCoverEachOther(t *testing.T) {
	a := api.New(api.Options{Service: service.New(service.Options{})})
	missing := map[string]bool{}
	for _, id := range a.Missing() {
		missing[id] = true
	}
	require.Equal(t, unbuilt, missing)
}

func encode(t testing.TB, v any) []byte {
	t.Helper()
	b, err := json.Marshal(v)
	require.NoError(t, err)
	return b
}
