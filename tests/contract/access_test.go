package contract

import (
	"bytes"
	"log/slog"
	"net"
	"net/http"
	"net/http/httptest"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/api"
	"railproof/api/exchange"
	"railproof/service"
	"railproof/service/access"
)

// guarded starts a server that asks for keys, and returns one key of each scope.
func guarded(t *testing.T, change func(*api.Access), log *slog.Logger) (at string, keys map[access.Scope]string) {
	t.Helper()
	keys = map[access.Scope]string{}
	var lines []string
	for _, s := range []access.Scope{access.Read, access.Compute, access.Admin} {
		key, line, err := access.NewKey(access.Caller{Name: "of-" + s.String(), Scope: s})
		require.NoError(t, err)
		keys[s] = key
		lines = append(lines, line)
	}
	path := filepath.Join(t.TempDir(), "keys")
	require.NoError(t, os.WriteFile(path, []byte(strings.Join(lines, "\n")), 0o600))
	k, err := access.OpenKeys(path, slog.New(slog.DiscardHandler))
	require.NoError(t, err)
	a := api.Access{Keys: k}
	if change != nil {
		change(&a)
	}
	s := httptest.NewServer(api.New(api.Options{Service: service.New(service.Options{ContractVersion: contract.Version()}), Access: a, Log: log}))
	t.Cleanup(s.Close)
	return s.URL, keys
}

func bearer(key string) []string { return []string{"Authorization", "Bearer " + key} }

func TestScopes(t *testing.T) {
	at, keys := guarded(t, nil, nil)
	cases := []struct {
		name, method, path string
		body               []byte
		need               access.Scope
	}{
		{"compute", "POST", "/v1/losses", []byte(minimal), access.Compute},
		{"dictionary", "GET", "/v1/quantities", nil, access.Read},
		{"jobs", "GET", "/v1/jobs", nil, access.Read},
		{"metrics", "GET", "/metrics", nil, access.Admin},
		{"contract", "GET", "/openapi.json", nil, access.None},
		{"docs", "GET", "/docs", nil, access.None},
		{"health", "GET", "/healthz", nil, access.None},
		{"readiness", "GET", "/readyz", nil, access.None},
	}
	for _, c := range cases {
		t.Run(c.name, func(t *testing.T) {
			r := send(t, c.method, at+c.path, c.body)
			if c.need == access.None {
				require.Equal(t, 200, r.status)
				return
			}
			refused(t, r, 401, exchange.Unauthorized)
			require.Contains(t, r.header.Get("WWW-Authenticate"), "Bearer")
			refused(t, send(t, c.method, at+c.path, c.body, bearer("railproof_x")...), 401, exchange.Unauthorized)
			refused(t, send(t, c.method, at+c.path, c.body, "Authorization", "Basic "+keys[access.Admin]), 401, exchange.Unauthorized)
			for s, key := range keys {
				r := send(t, c.method, at+c.path, c.body, bearer(key)...)
				if s < c.need {
					refused(t, r, 403, exchange.Forbidden)
				} else {
					require.Equal(t, 200, r.status, "%s: %.200s", s, r.body)
				}
			}
		})
	}
}

func TestAStrangerLearnsNothingOfTheBody(t *testing.T) {
	at, _ := guarded(t, nil, nil)
	refused(t, send(t, "POST", at+"/v1/losses?x=1", []byte(`{`), "Content-Type", "text/plain"), 401, exchange.Unauthorized)
}

func TestQuotas(t *testing.T) {
	at, keys := guarded(t, func(a *api.Access) { a.Limiter = access.NewLimiter(0.001, 3) }, nil)
	get := func(key string) *reply { return send(t, "GET", at+"/v1/jobs", nil, bearer(key)...) }
	for _, left := range []string{"r=2;", "r=1;", "r=0;"} {
		r := get(keys[access.Read])
		require.Equal(t, 200, r.status)
		require.Contains(t, r.header.Get("RateLimit"), left)
		require.Equal(t, `"requests";q=3;w=3000`, r.header.Get("RateLimit-Policy"))
	}
	r := get(keys[access.Read])
	refused(t, r, 429, exchange.TooMany)
	declared(t, "listJobs", r)
	require.NotEmpty(t, r.header.Get("Retry-After"))
	require.Equal(t, 200, get(keys[access.Compute]).status, "each key has its own")
	for range 2 { // the page of the problem above was the first
		require.Equal(t, 401, send(t, "GET", at+"/v1/jobs", nil, "X-Forwarded-For", "10.0.0.1").status)
	}
	require.Equal(t, 429, send(t, "GET", at+"/v1/jobs", nil, "X-Forwarded-For", "10.0.0.2").status, "a made-up address helps nobody")
	require.Equal(t, 200, send(t, "GET", at+"/healthz", nil).status, "watching is not counted")
}

func TestAProxyIsBelievedWhenItIsNamed(t *testing.T) {
	_, loopback, err := net.ParseCIDR("127.0.0.0/8")
	require.NoError(t, err)
	at, _ := guarded(t, func(a *api.Access) { a.Limiter, a.Proxies = access.NewLimiter(0.001, 1), []*net.IPNet{loopback} }, nil)
	require.Equal(t, 200, send(t, "GET", at+"/docs", nil, "X-Forwarded-For", "10.0.0.1").status)
	require.Equal(t, 429, send(t, "GET", at+"/docs", nil, "X-Forwarded-For", "10.0.0.1").status)
	require.Equal(t, 200, send(t, "GET", at+"/docs", nil, "X-Forwarded-For", "10.0.0.2").status)
}

func TestOnlyNamedHostsAreServed(t *testing.T) {
	h := api.New(api.Options{Service: service.New(service.Options{ContractVersion: contract.Version()}), Access: api.Access{Hosts: []string{"localhost", "::1"}}})
	for host, status := range map[string]int{"localhost": 200, "LOCALHOST:8080": 200, "[::1]:8080": 200, "attacker.example": 400, "localhost.attacker.example": 400, "": 400} {
		r := httptest.NewRequestWithContext(t.Context(), "GET", "/healthz", nil)
		r.Host = host
		w := httptest.NewRecorder()
		h.ServeHTTP(w, r)
		require.Equal(t, status, w.Code, host)
	}
}

func TestBrowsersOfOtherOrigins(t *testing.T) {
	preflight := []string{"Origin", "https://plm.example", "Access-Control-Request-Method", "POST", "Access-Control-Request-Headers", "content-type"}
	off := send(t, "OPTIONS", server(t)+"/v1/losses", nil, preflight...)
	require.Empty(t, off.header.Get("Access-Control-Allow-Origin"), "off unless asked for")
	at, _ := guarded(t, func(a *api.Access) { a.Origins = []string{"https://plm.example"} }, nil)
	on := send(t, "OPTIONS", at+"/v1/losses", nil, preflight...)
	require.Equal(t, "https://plm.example", on.header.Get("Access-Control-Allow-Origin"))
	preflight[1] = "https://attacker.example"
	require.Empty(t, send(t, "OPTIONS", at+"/v1/losses", nil, preflight...).header.Get("Access-Control-Allow-Origin"))
}

func TestEveryAnswerHasTheSecurityHeaders(t *testing.T) {
	at := server(t)
	for _, path := range []string{"/healthz", "/v1/quantities", "/docs", "/nowhere", "/openapi.json"} {
		r := send(t, "GET", at+path, nil)
		require.Equal(t, "nosniff", r.header.Get("X-Content-Type-Options"), path)
		require.Equal(t, "DENY", r.header.Get("X-Frame-Options"), path)
		require.Contains(t, r.header.Get("Content-Security-Policy"), "frame-ancestors 'none'", path)
		require.Equal(t, "no-referrer", r.header.Get("Referrer-Policy"), path)
	}
}

// What must not be in a log: keys, bodies, part data, addresses' parameters.
func TestLogsTellNoSecrets(t *testing.T) {
	var log bytes.Buffer
	at, keys := guarded(t, nil, slog.New(slog.NewJSONHandler(&log, &slog.HandlerOptions{Level: slog.LevelDebug})))
	body := strings.Replace(minimal, `"rectifier"`, `"name": "secret-rail", "rectifier"`, 1)
	require.Equal(t, 200, send(t, "POST", at+"/v1/losses?timings=true", []byte(body), bearer(keys[access.Compute])...).status)
	require.Equal(t, 422, send(t, "POST", at+"/v1/losses", []byte(strings.Replace(body, "6.8e-6", "22", 1)), bearer(keys[access.Compute])...).status)
	require.Equal(t, 401, send(t, "POST", at+"/v1/losses", []byte(body), bearer("railproof_wrong")...).status)
	text := log.String()
	require.Equal(t, 3, strings.Count(text, `"msg":"request"`))
	require.Contains(t, text, `"caller":"of-compute"`)
	require.Regexp(t, `"result_id":"res_[0-9a-f]{64}"`, text)
	for _, secret := range []string{"secret-rail", "railproof_", "timings", "6.8e-6", "inductance", keys[access.Compute][10:20]} {
		require.NotContains(t, text, secret)
	}
}

func TestMetricsAreListedInTheirPage(t *testing.T) {
	at, _ := jobServer(t)
	for range 2 {
		require.Equal(t, 200, send(t, "POST", at+"/v1/losses", []byte(minimal)).status)
	}
	require.Equal(t, 404, send(t, http.MethodGet, at+"/nowhere/"+strings.Repeat("x", 50), nil).status)
	r := send(t, "GET", at+"/metrics", nil)
	require.Equal(t, 200, r.status)
	require.Contains(t, r.header.Get("Content-Type"), "text/plain")
	text := string(r.body)
	require.Contains(t, text, `railproof_http_request_duration_seconds_count{method="POST",route="/v1/losses",status="200"} 2`)
	require.Contains(t, text, "railproof_evaluations_total 1\n", "the second answer was kept")
	require.Contains(t, text, `railproof_jobs{state="waiting"} 0`)
	require.Contains(t, text, "railproof_jobs_store_up 1")
	require.NotContains(t, text, "nowhere")

	page, err := os.ReadFile("../../api/docs/operations.md")
	require.NoError(t, err)
	told := map[string]bool{}
	for _, line := range strings.Split(string(page), "\n") {
		if name, found := strings.CutPrefix(line, "| `railproof_"); found {
			told["railproof_"+name[:strings.IndexAny(name, "`{")]] = true
		}
	}
	given := map[string]bool{}
	for _, line := range strings.Split(text, "\n") {
		if name, found := strings.CutPrefix(line, "# TYPE railproof_"); found {
			given["railproof_"+strings.Fields(name)[0]] = true
		}
	}
	require.NotEmpty(t, given)
	require.Equal(t, given, told)
}
