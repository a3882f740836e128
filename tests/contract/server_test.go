// Package contract drives the whole server over HTTP, from outside: every answer
// is what the contract says, and nothing a client sends breaks it.
package contract

import (
	"bytes"
	"encoding/json"
	"io"
	"net/http"
	"net/http/httptest"
	"testing"
	"time"

	"github.com/stretchr/testify/require"

	"railproof/api"
	"railproof/openapi"
	"railproof/service"
)

var contract = openapi.Load()

// server starts the real handler on a loopback port.
func server(t testing.TB) string {
	t.Helper()
	s := httptest.NewServer(handler())
	t.Cleanup(s.Close)
	return s.URL
}

// handler is the real thing, with time for machines that do much else at once.
func handler() http.Handler {
	return api.New(api.Options{Service: service.New(service.Options{ContractVersion: contract.Version()}), Deadline: 10 * time.Minute})
}

type reply struct {
	status int
	header http.Header
	body   []byte
}

// tree returns the body as JSON.
func (r *reply) tree(t testing.TB) any {
	t.Helper()
	var v any
	require.NoError(t, json.Unmarshal(r.body, &v), "%s", r.body)
	return v
}

func send(t testing.TB, method, url string, body []byte, headers ...string) *reply {
	t.Helper()
	request, err := http.NewRequestWithContext(t.Context(), method, url, bytes.NewReader(body))
	require.NoError(t, err)
	if body != nil {
		request.Header.Set("Content-Type", "application/json")
	}
	for i := 0; i < len(headers); i += 2 {
		request.Header.Set(headers[i], headers[i+1])
	}
	response, err := http.DefaultClient.Do(request)
	require.NoError(t, err)
	defer response.Body.Close()
	got, err := io.ReadAll(response.Body)
	require.NoError(t, err)
	return &reply{response.StatusCode, response.Header, got}
}

// declared checks that the operation may answer so.
func declared(t testing.TB, operation string, r *reply) {
	t.Helper()
	var body any
	if len(r.body) > 0 && json.Unmarshal(r.body, &body) != nil {
		body = nil
	}
	require.Empty(t, contract.ValidateResponse(operation, r.status, body), "status %d, body %.300s", r.status, r.body)
}
