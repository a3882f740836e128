package contract

import (
	"bytes"
	"compress/gzip"
	"io"
	"regexp"
	"slices"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/api/docs"
	"railproof/api/exchange"
)

// Whoever follows the type of a problem finds its page.
func TestEveryProblemHasItsPage(t *testing.T) {
	at := server(t)
	for _, k := range exchange.Kinds() {
		r := send(t, "GET", at+"/docs/problems/"+string(k.Kind), nil)
		require.Equal(t, 200, r.status, k.Kind)
		require.Contains(t, string(r.body), "<h1>"+k.Title+"</h1>")
		if slices.Contains([]exchange.Kind{exchange.Malformed, exchange.SchemaFault, exchange.PhysicsFault}, k.Kind) {
			require.Contains(t, string(r.body), "&#34;pointer&#34;", "%s: a real refusal is shown", k.Kind)
		}
	}
}

var reference = regexp.MustCompile(`(?:href|src)="([^"]*)"`)

// Pages point at this server only, and everything that they point at is there.
func TestPagesPointAtWhatIsThere(t *testing.T) {
	at := server(t)
	seen := map[string]bool{}
	var visit func(path string)
	visit = func(path string) {
		if seen[path] {
			return
		}
		seen[path] = true
		r := send(t, "GET", at+path, nil)
		if r.status != 200 {
			t.Errorf("%s: status %d", path, r.status)
		}
		if !bytes.HasPrefix(r.body, []byte("<!doctype html>")) {
			return
		}
		for _, m := range reference.FindAllStringSubmatch(string(r.body), -1) {
			target, _, _ := strings.Cut(m[1], "#")
			switch {
			case target == "" || target == "data:,":
			case strings.HasPrefix(target, "/"):
				visit(target)
			default:
				t.Errorf("%s points at %s", path, m[1])
			}
		}
	}
	visit("/docs")
	require.Greater(t, len(seen), 20)
}

func TestAssetsWithAndWithoutCompression(t *testing.T) {
	at := server(t)
	require.NotEmpty(t, docs.Assets())
	for _, asset := range docs.Assets() {
		path := at + "/docs/assets/" + asset.Name
		plain := send(t, "GET", path, nil, "Accept-Encoding", "identity")
		require.Equal(t, 200, plain.status, asset.Name)
		require.Empty(t, plain.header.Get("Content-Encoding"))
		require.Equal(t, asset.MediaType, plain.header.Get("Content-Type"))
		small := send(t, "GET", path, nil, "Accept-Encoding", "gzip")
		require.Equal(t, "gzip", small.header.Get("Content-Encoding"))
		r, err := gzip.NewReader(bytes.NewReader(small.body))
		require.NoError(t, err)
		read, err := io.ReadAll(r)
		require.NoError(t, err)
		require.True(t, bytes.Equal(plain.body, read), asset.Name)
		require.Equal(t, 304, send(t, "GET", path, nil, "Accept-Encoding", "gzip", "If-None-Match", small.header.Get("ETag")).status)
	}
	require.Equal(t, 404, send(t, "GET", at+"/docs/assets/none.js", nil).status)
}

func TestStillPagesRunNothing(t *testing.T) {
	at := server(t)
	for _, path := range []string{"/docs", "/docs/quantities", "/docs/rule-packs", "/docs/problems/schema", "/docs/requests"} {
		r := send(t, "GET", at+path, nil)
		require.NotContains(t, string(r.body), "<script", path)
		require.NotContains(t, r.header.Get("Content-Security-Policy"), "script-src", path)
	}
	for _, path := range []string{"/docs/contract", "/docs/console"} {
		policy := send(t, "GET", at+path, nil).header.Get("Content-Security-Policy")
		require.Contains(t, policy, "default-src 'none'; script-src 'self';", path)
		require.NotContains(t, policy, "unsafe-eval", path)
	}
}
