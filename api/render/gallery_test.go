package render_test

import (
	"io/fs"
	"os"
	"path/filepath"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/api/exchange"
	"railproof/api/render"
	"railproof/openapi"
	"railproof/service"
)

// answer computes an example with the changes made to its text.
func answer[A any](t testing.TB, operation string, body []byte) A {
	t.Helper()
	contract := openapi.Load()
	x := exchange.New(contract, service.New(service.Options{ContractVersion: contract.Version()}))
	a, problem := x.Do(t.Context(), operation, body)
	require.Nil(t, problem)
	return a.Value.(A)
}

func example(t testing.TB, name string) []byte {
	t.Helper()
	body, err := fs.ReadFile(openapi.Examples(), name)
	require.NoError(t, err)
	return body
}

// show writes a picture where RAILPROOF_PICTURES says, to be looked at.
func show(t testing.TB, name string, p *render.Picture) {
	t.Helper()
	require.NotNil(t, p, name)
	dir := os.Getenv("RAILPROOF_PICTURES")
	if dir == "" {
		return
	}
	require.NoError(t, os.WriteFile(filepath.Join(dir, name+".png"), p.PNG(0), 0o600))
	require.NoError(t, os.WriteFile(filepath.Join(dir, name+"-narrow.png"), p.PNG(400), 0o600))
	require.NoError(t, os.WriteFile(filepath.Join(dir, name+".svg"), p.SVG(0), 0o600))
}
