package exchange

import (
	"bytes"
	"io/fs"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/openapi"
	"railproof/service"
)

// The promise: a whole report of buoy-5v0 within half a second, with a worst case
// of 100,000 evaluations: about 10,000 units at each of its condition corners.
func BenchmarkReport(b *testing.B) {
	body, err := fs.ReadFile(openapi.Examples(), "buoy-5v0/reports.json")
	require.NoError(b, err)
	contract := openapi.Load()
	x := New(contract, service.New(service.Options{ContractVersion: contract.Version()}))
	for _, c := range []struct{ name, samples string }{{"10000-units", `"samples": 10000`}, {"100000-units", `"samples": 100000`}} {
		request := bytes.Replace(body, []byte(`"samples": 10000`), []byte(c.samples), 1)
		b.Run(c.name, func(b *testing.B) {
			for b.Loop() {
				answer, problem := x.Do(b.Context(), "reports", request)
				require.Nil(b, problem)
				require.NotEmpty(b, answer.Body)
			}
		})
	}
}
