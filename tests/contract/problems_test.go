package contract

import (
	"bufio"
	"bytes"
	"compress/gzip"
	"context"
	"encoding/json"
	"fmt"
	"io"
	"net"
	"net/http"
	"net/http/httptest"
	"strings"
	"testing"
	"time"

	"github.com/stretchr/testify/require"

	"railproof/api"
	"railproof/api/exchange"
	"railproof/service"
)

const minimal = `{"stage": {"rectifier": "synchronous", "switching_frequency_hz": 500e3,
 "high_side": {"on_resistance_ohm": 9e-3}, "low_side": {"on_resistance_ohm": 4e-3},
 "inductor": {"inductance_h": 6.8e-6}, "output_capacitors": [{"capacitance_f": 88e-6}]},
 "point": {"input_v": 24, "load": {"current_a": 6}, "ambient_degc": 45, "control": {"regulate_to_v": 5}}}`

// swapped returns the minimal request with one piece of its text replaced.
func swapped(t *testing.T, was, is string) []byte {
	t.Helper()
	require.Equal(t, 1, strings.Count(minimal, was), was)
	return []byte(strings.Replace(minimal, was, is, 1))
}

// refused checks a problem and returns its first fault.
func refused(t *testing.T, r *reply, status int, kind exchange.Kind) map[string]any {
	t.Helper()
	require.Equal(t, status, r.status, "%s", r.body)
	require.Equal(t, "application/problem+json", r.header.Get("Content-Type"))
	p := r.tree(t).(map[string]any)
	require.Empty(t, contract.ValidateAs("Problem", p))
	require.True(t, strings.HasSuffix(p["type"].(string), "/docs/problems/"+string(kind)), p["type"])
	require.EqualValues(t, status, p["status"])
	require.NotEmpty(t, p["title"])
	require.Equal(t, r.header.Get("X-Request-Id"), p["instance"])
	require.Equal(t, http.StatusOK, send(t, "GET", p["type"].(string), nil).status, "the type is a page")
	faults, _ := p["errors"].([]any)
	if len(faults) == 0 {
		return nil
	}
	return faults[0].(map[string]any)
}

func TestDocumentsThatCannotBeRead(t *testing.T) {
	at := server(t) + "/v1/losses"
	cases := []struct{ name, was, is, pointer, keyword string }{
		{"syntax", `"point":`, `"point"`, "/point", "syntax"},
		{"duplicate-key", `"ambient_degc": 45`, `"ambient_degc": 45, "ambient_degc": 46`, "/point/ambient_degc", "duplicate-key"},
		{"duplicate-key-in-disguise", `"ambient_degc": 45`, `"ambient_degc": 45, "\u0061mbient_degc": 46`, "/point/ambient_degc", "duplicate-key"},
		{"number-too-large", `6.8e-6`, `1e400`, "/stage/inductor/inductance_h", "number-range"},
		{"nan", `6.8e-6`, `NaN`, "/stage/inductor/inductance_h", "syntax"},
		{"infinity", `6.8e-6`, `Infinity`, "/stage/inductor/inductance_h", "syntax"},
		{"comment", `"point":`, `/* */ "point":`, "", "syntax"},
		{"text-after", `"regulate_to_v": 5}}}`, `"regulate_to_v": 5}}} 7`, "", "syntax"},
		{"invalid-utf-8", `"synchronous"`, "\"\xff\"", "/stage/rectifier", "syntax"},
		{"unfinished", `"regulate_to_v": 5}}}`, `"regulate_to_v": 5`, "", "syntax"},
	}
	for _, c := range cases {
		t.Run(c.name, func(t *testing.T) {
			f := refused(t, send(t, "POST", at, swapped(t, c.was, c.is)), 400, exchange.Malformed)
			require.Equal(t, c.keyword, f["keyword"])
			if c.pointer != "" {
				require.Equal(t, c.pointer, f["pointer"])
			}
		})
	}
	t.Run("empty", func(t *testing.T) { refused(t, send(t, "POST", at, []byte{}), 400, exchange.Malformed) })
	t.Run("nested-too-deeply", func(t *testing.T) {
		body := strings.Repeat(`[`, 33) + strings.Repeat(`]`, 33)
		require.Equal(t, "depth", refused(t, send(t, "POST", at, []byte(body)), 400, exchange.Malformed)["keyword"])
	})
	t.Run("nested-beyond-any-parser", func(t *testing.T) {
		refused(t, send(t, "POST", at, bytes.Repeat([]byte(`[`), 1<<19)), 400, exchange.Malformed)
	})
}

func TestDocumentsThatBreakTheSchema(t *testing.T) {
	at := server(t) + "/v1/losses"
	cases := []struct{ name, was, is, pointer, keyword string }{
		{"unknown-field", `"ambient_degc": 45`, `"ambient_degc": 45, "ambient_c": 45`, "/point/ambient_c", "additionalProperties"},
		{"wrong-type", `6.8e-6`, `"6.8u"`, "/stage/inductor/inductance_h", "type"},
		{"null", `6.8e-6`, `null`, "/stage/inductor/inductance_h", "type"},
		{"absurd-inductance", `6.8e-6`, `22`, "/stage/inductor/inductance_h", "maximum"},
		{"absurd-spread", `6.8e-6`, `{"typ": 6.8e-6, "max": 22}`, "/stage/inductor/inductance_h/max", "maximum"},
		{"negative", `6.8e-6`, `-6.8e-6`, "/stage/inductor/inductance_h", "minimum"},
		{"missing", `"ambient_degc": 45, `, ``, "/point/ambient_degc", "required"},
		{"two-controls", `{"regulate_to_v": 5}`, `{"regulate_to_v": 5, "duty_ratio": 0.2}`, "/point/control", "maxProperties"},
		{"unknown-rectifier", `"synchronous"`, `"magnetic"`, "/stage/rectifier", "enum"},
		{"fraction-of-a-phase", `"rectifier"`, `"phase_count": 1.5, "rectifier"`, "/stage/phase_count", "type"},
	}
	for _, c := range cases {
		t.Run(c.name, func(t *testing.T) {
			f := refused(t, send(t, "POST", at, swapped(t, c.was, c.is)), 422, exchange.SchemaFault)
			require.Equal(t, c.pointer, f["pointer"])
			require.Equal(t, c.keyword, f["keyword"])
			require.NotEmpty(t, f["detail"])
		})
	}
	t.Run("not-an-object", func(t *testing.T) { refused(t, send(t, "POST", at, []byte(`[]`)), 422, exchange.SchemaFault) })
}

func TestDocumentsThatMakeNoPhysicalSense(t *testing.T) {
	at := server(t) + "/v1/losses"
	cases := []struct{ name, was, is, pointer, keyword string }{
		{"output-above-input", `"regulate_to_v": 5`, `"regulate_to_v": 30`, "/point/control/regulate_to_v", "physics"},
		{"no-feedback", `"control": {"regulate_to_v": 5}`, `"control": {"regulate_by": "feedback"}`, "/point/control/regulate_by", "required"},
		{"spread-upside-down", `6.8e-6`, `{"typ": 6.8e-6, "min": 7e-6}`, "/stage/inductor/inductance_h/min", "spread"},
		{"no-low-side", `"low_side": {"on_resistance_ohm": 4e-3},`, ``, "/stage/low_side/on_resistance_ohm", "required"},
		{"point-and-grid", `"point":`, `"grid": {"input_v": [24], "load_current_a": [1], "ambient_degc": [25], "control": {"regulate_to_v": 5}}, "point":`, "", "form"},
	}
	for _, c := range cases {
		t.Run(c.name, func(t *testing.T) {
			f := refused(t, send(t, "POST", at, swapped(t, c.was, c.is)), 422, exchange.PhysicsFault)
			require.Equal(t, c.pointer, f["pointer"])
			require.Equal(t, c.keyword, f["keyword"])
		})
	}
	t.Run("too-many-cells", func(t *testing.T) {
		axis := strings.Repeat("1,", 199) + "1"
		body := swapped(t, `"point": {"input_v": 24, "load": {"current_a": 6}, "ambient_degc": 45, "control"`, `"grid": {"input_v": [24], "load_current_a": [`+axis+`], "ambient_degc": [`+axis+`], "control"`)
		require.Equal(t, "budget", refused(t, send(t, "POST", at, body), 422, exchange.PhysicsFault)["keyword"])
	})
}

func TestEveryFaultIsToldAtOnce(t *testing.T) {
	body := strings.NewReplacer(`6.8e-6`, `22`, `88e-6`, `-1`, `"ambient_degc": 45`, `"ambient_degc": 1e4`).Replace(minimal)
	r := send(t, "POST", server(t)+"/v1/losses", []byte(body))
	refused(t, r, 422, exchange.SchemaFault)
	require.Len(t, r.tree(t).(map[string]any)["errors"], 3)
}

// A client that writes all of its body before it looks for an answer gets one too,
// however the length is told.
func TestTooLargeBodiesAreReadToTheirEnd(t *testing.T) {
	address := strings.TrimPrefix(server(t), "http://")
	blank := strings.Repeat(" ", 5<<20)
	for _, body := range []string{
		fmt.Sprintf("Content-Length: %d\r\n\r\n%s", len(blank), blank),
		fmt.Sprintf("Transfer-Encoding: chunked\r\n\r\n%x\r\n%s\r\n0\r\n\r\n", len(blank), blank),
	} {
		c, err := new(net.Dialer).DialContext(t.Context(), "tcp", address)
		require.NoError(t, err)
		defer func() { _ = c.Close() }()
		_, err = io.WriteString(c, "POST /v1/losses HTTP/1.1\r\nHost: "+address+"\r\nContent-Type: application/json\r\n"+body)
		require.NoError(t, err)
		r, err := http.ReadResponse(bufio.NewReader(c), nil)
		require.NoError(t, err)
		defer r.Body.Close()
		require.Equal(t, 413, r.StatusCode)
	}
}

func TestRequestsThatAreNotTaken(t *testing.T) {
	at := server(t)
	body := []byte(minimal)
	refused(t, send(t, "POST", at+"/v1/losses", body, "Content-Type", "text/plain"), 415, exchange.UnsupportedMedia)
	refused(t, send(t, "POST", at+"/v1/losses", body, "Content-Type", "application/json; charset=latin1"), 415, exchange.UnsupportedMedia)
	var zipped bytes.Buffer
	z := gzip.NewWriter(&zipped)
	_, err := z.Write(body)
	require.NoError(t, err)
	require.NoError(t, z.Close())
	refused(t, send(t, "POST", at+"/v1/losses", zipped.Bytes(), "Content-Encoding", "gzip"), 415, exchange.UnsupportedMedia)
	refused(t, send(t, "POST", at+"/v1/losses", body, "Accept", "audio/ogg, text/html"), 406, exchange.NotAcceptable)
	refused(t, send(t, "POST", at+"/v1/losses", body, "Accept", "application/json;q=0"), 406, exchange.NotAcceptable)
	refused(t, send(t, "POST", at+"/v1/losses", bytes.Repeat([]byte(" "), 1<<20+1)), 413, exchange.TooLarge)
	refused(t, send(t, "POST", at+"/v1/losses?verbose=1", body), 400, exchange.UnknownParameter)
	refused(t, send(t, "POST", at+"/v1/losses?timings=true&timings=true", body), 400, exchange.UnknownParameter)
	refused(t, send(t, "POST", at+"/v1/losses?timings=%zz", body), 400, exchange.UnknownParameter)
	refused(t, send(t, "GET", at+"/v1/nothing", nil), 404, exchange.NotFound)
	r := send(t, "DELETE", at+"/v1/losses", nil)
	refused(t, r, 405, exchange.MethodNotAllowed)
	require.Contains(t, r.header.Get("Allow"), "POST")
	require.Equal(t, 200, send(t, "POST", at+"/v1/losses", body, "Accept", "text/html;q=0.2, application/*;q=0.5").status)
	require.Equal(t, 200, send(t, "POST", at+"/v1/losses", body, "Content-Type", "application/json; charset=UTF-8").status)
}

func TestTimeThatRunsOutIsA503(t *testing.T) {
	h := api.New(api.Options{Service: service.New(service.Options{ContractVersion: contract.Version()}), Deadline: time.Nanosecond})
	request := httptest.NewRequestWithContext(context.Background(), "POST", "/v1/losses", strings.NewReader(minimal))
	request.Header.Set("Content-Type", "application/json")
	w := httptest.NewRecorder()
	h.ServeHTTP(w, request)
	require.Equal(t, 503, w.Code)
	require.NotEmpty(t, w.Header().Get("Retry-After"))
	var p map[string]any
	require.NoError(t, json.Unmarshal(w.Body.Bytes(), &p))
	require.Empty(t, contract.ValidateResponse("losses", 503, p))
	require.True(t, strings.HasSuffix(p["type"].(string), string(exchange.Deadline)))
}

func TestReadinessSaysDraining(t *testing.T) {
	h := api.New(api.Options{Service: service.New(service.Options{})})
	ask := func(path string) *httptest.ResponseRecorder {
		w := httptest.NewRecorder()
		h.ServeHTTP(w, httptest.NewRequestWithContext(context.Background(), "GET", path, nil))
		return w
	}
	require.Equal(t, 200, ask("/readyz").Code)
	h.Drain()
	w := ask("/readyz")
	require.Equal(t, 503, w.Code)
	require.JSONEq(t, `{"status": "draining", "reasons": ["the server is shutting down"]}`, w.Body.String())
	require.Equal(t, 200, ask("/healthz").Code)
}
