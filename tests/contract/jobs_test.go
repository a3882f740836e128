package contract

import (
	"bufio"
	"bytes"
	"compress/gzip"
	"encoding/json"
	"io"
	"net/http"
	"net/http/httptest"
	"strings"
	"testing"
	"time"

	"github.com/stretchr/testify/require"

	"railproof/api"
	"railproof/api/exchange"
	"railproof/openapi"
	"railproof/service"
	"railproof/service/jobs"
)

// jobServer starts the real handler with jobs in memory.
func jobServer(t testing.TB) (string, *api.API) {
	t.Helper()
	s := service.New(service.Options{ContractVersion: contract.Version()})
	board, err := jobs.Open(t.Context(), jobs.Options{Executor: exchange.New(contract, s).Executor(), Engine: s.Engine().Platform})
	require.NoError(t, err)
	a := api.New(api.Options{Service: s, Jobs: board})
	server := httptest.NewServer(a)
	t.Cleanup(func() {
		a.Drain()
		server.Close()
		require.NoError(t, board.Close(t.Context()))
	})
	return server.URL, a
}

// sized is the sizing example with another output voltage, so that it is another
// request.
func sized(t testing.TB, volt float64) []byte {
	t.Helper()
	var tree map[string]any
	require.NoError(t, json.Unmarshal(exampleRequest(t, "buoy-3v3/sizing.json"), &tree))
	tree["requirement"].(map[string]any)["output"].(map[string]any)["voltage_v"] = volt
	return encode(t, tree)
}

func settled(t testing.TB, url string) map[string]any {
	t.Helper()
	for range 2000 {
		r := send(t, "GET", url, nil)
		require.Equal(t, 200, r.status, "%s", r.body)
		declared(t, "getJob", r)
		j := r.tree(t).(map[string]any)
		if s := j["state"]; s != "waiting" && s != "running" {
			require.Empty(t, r.header.Get("Retry-After"))
			return j
		}
		require.NotEmpty(t, r.header.Get("Retry-After"))
		time.Sleep(5 * time.Millisecond)
	}
	t.Fatal("the job does not end")
	return nil
}

func TestAJobGivesTheBytesOfTheDirectAnswer(t *testing.T) {
	at, _ := jobServer(t)
	body := sized(t, 3.3)
	direct := send(t, "POST", server(t)+"/v1/sizing", body)
	require.Equal(t, 200, direct.status)

	r := send(t, "POST", at+"/v1/sizing", body, "Prefer", "respond-async")
	require.Equal(t, 202, r.status, "%s", r.body)
	declared(t, "sizing", r)
	require.Equal(t, "respond-async", r.header.Get("Preference-Applied"))
	require.NotEmpty(t, r.header.Get("Retry-After"))
	location := r.header.Get("Location")
	require.Regexp(t, `^/v1/jobs/job_[0-9a-z]+$`, location)

	j := settled(t, at+location)
	require.Equal(t, "done", j["state"])
	require.EqualValues(t, 1, j["progress"].(map[string]any)["fraction_ratio"])
	result := send(t, "GET", at+"/v1/results/"+j["result_id"].(string), nil)
	require.Equal(t, 200, result.status)
	require.Equal(t, string(direct.body), string(result.body))

	again := send(t, "POST", at+"/v1/sizing", body, "Prefer", "respond-async")
	require.Equal(t, location, again.header.Get("Location"), "the same request is the same job")
	waited := send(t, "POST", at+"/v1/sizing", body, "Prefer", "respond-async, wait=5")
	require.Equal(t, 200, waited.status)
	require.Equal(t, "respond-async, wait=5", waited.header.Get("Preference-Applied"))
	require.Equal(t, string(direct.body), string(waited.body))
}

func TestNothingIsDeferredUnasked(t *testing.T) {
	at, _ := jobServer(t)
	for _, prefer := range []string{"", "wait=10", "return=minimal", "respond-asynchronously"} {
		r := send(t, "POST", at+"/v1/sizing", sized(t, 3.3), "Prefer", prefer)
		require.Equal(t, 200, r.status)
		require.Empty(t, r.header.Get("Preference-Applied"))
	}
	require.Equal(t, 200, send(t, "POST", at+"/v1/losses", []byte(minimal), "Prefer", "respond-async").status, "short work is answered")
	require.Equal(t, 422, send(t, "POST", at+"/v1/sizing", []byte(`{}`), "Prefer", "respond-async").status, "refused before it is kept")
	list := send(t, "GET", at+"/v1/jobs", nil)
	declared(t, "listJobs", list)
	require.Empty(t, list.tree(t).(map[string]any)["jobs"])
}

func TestJobsAreListedInPages(t *testing.T) {
	at, _ := jobServer(t)
	var want []string
	for i := range 5 {
		r := send(t, "POST", at+"/v1/sizing", sized(t, 2+0.1*float64(i)), "Prefer", "respond-async")
		want = append([]string{r.tree(t).(map[string]any)["id"].(string)}, want...)
		time.Sleep(2 * time.Millisecond)
	}
	var got []string
	for url := at + "/v1/jobs?limit=2"; url != ""; {
		r := send(t, "GET", url, nil)
		declared(t, "listJobs", r)
		page := r.tree(t).(map[string]any)
		for _, j := range page["jobs"].([]any) {
			got = append(got, j.(map[string]any)["id"].(string))
		}
		url = ""
		if next, more := page["next"].(string); more {
			url = at + "/v1/jobs?limit=2&cursor=" + next
		}
	}
	require.Equal(t, want, got)
	refused(t, send(t, "GET", at+"/v1/jobs?cursor=x", nil), 400, exchange.UnknownParameter)
	refused(t, send(t, "GET", at+"/v1/jobs?limit=0", nil), 400, exchange.UnknownParameter)
}

func TestJobsThatAreNotThere(t *testing.T) {
	at, _ := jobServer(t)
	for _, at := range []string{at, server(t)} {
		refused(t, send(t, "GET", at+"/v1/jobs/job_x", nil), 404, exchange.NotFound)
		refused(t, send(t, "GET", at+"/v1/jobs/job_x/events", nil), 404, exchange.NotFound)
		refused(t, send(t, "DELETE", at+"/v1/jobs/job_x", nil), 404, exchange.NotFound)
		refused(t, send(t, "GET", at+"/v1/jobs/x", nil), 400, exchange.UnknownParameter)
		refused(t, send(t, "GET", at+"/v1/results/res_"+strings.Repeat("0", 64), nil), 404, exchange.NotFound)
	}
}

func TestAFailedJobHasTheProblem(t *testing.T) {
	at, _ := jobServer(t)
	body := bytes.Replace(sized(t, 3.3), []byte(`"min_v":18`), []byte(`"min_v":50`), 1)
	direct := send(t, "POST", at+"/v1/sizing", body)
	require.Equal(t, 422, direct.status, "%s", direct.body)
	r := send(t, "POST", at+"/v1/sizing", body, "Prefer", "respond-async")
	require.Equal(t, 202, r.status)
	j := settled(t, at+r.header.Get("Location"))
	require.Equal(t, "failed", j["state"])
	problem := j["problem"].(map[string]any)
	require.Equal(t, direct.tree(t).(map[string]any)["errors"], problem["errors"])
	require.Equal(t, 200, send(t, "GET", problem["type"].(string), nil).status)
	refused(t, send(t, "DELETE", at+r.header.Get("Location"), nil), 409, exchange.Conflict)
	waited := send(t, "POST", at+"/v1/sizing", body, "Prefer", "respond-async, wait=5")
	require.Equal(t, 422, waited.status)
}

type event struct {
	id   string
	data map[string]any
}

// events reads a stream to its end.
func events(t testing.TB, url string, headers ...string) []event {
	t.Helper()
	request, err := http.NewRequestWithContext(t.Context(), http.MethodGet, url, nil)
	require.NoError(t, err)
	request.Header.Set("Accept", "text/event-stream")
	for i := 0; i < len(headers); i += 2 {
		request.Header.Set(headers[i], headers[i+1])
	}
	response, err := http.DefaultClient.Do(request)
	require.NoError(t, err)
	defer response.Body.Close()
	require.Equal(t, 200, response.StatusCode)
	require.Equal(t, "text/event-stream", response.Header.Get("Content-Type"))
	var list []event
	var e event
	for lines := bufio.NewScanner(response.Body); lines.Scan(); {
		name, value, _ := strings.Cut(lines.Text(), ": ")
		switch name {
		case "id":
			e.id = value
		case "data":
			require.NoError(t, json.Unmarshal([]byte(value), &e.data))
			require.Empty(t, contract.ValidateAs("Job", e.data))
			list = append(list, e)
			e = event{}
		}
	}
	return list
}

func TestEventsTellAJobToItsEndAndResume(t *testing.T) {
	at, _ := jobServer(t)
	r := send(t, "POST", at+"/v1/sizing", sized(t, 3.3), "Prefer", "respond-async")
	url := at + r.header.Get("Location") + "/events"
	list := events(t, url)
	last := list[len(list)-1]
	require.Equal(t, "done", last.data["state"])
	for i := 1; i < len(list); i++ {
		require.NotEqual(t, list[i-1].id, list[i].id)
	}
	resumed := events(t, url, "Last-Event-ID", list[0].id)
	require.Equal(t, last, resumed[len(resumed)-1])
	require.LessOrEqual(t, len(resumed), 1)
	require.Equal(t, last, events(t, url, "Last-Event-ID", "nonsense")[0])
}

func TestEventStreamsEndWhenTheServerDrains(t *testing.T) {
	at, a := jobServer(t)
	hold := slowJob(t, at)
	ended := make(chan int, 1)
	go func() { ended <- len(events(t, at+hold+"/events")) }()
	time.Sleep(50 * time.Millisecond)
	a.Drain()
	select {
	case n := <-ended:
		require.Positive(t, n)
	case <-time.After(2 * time.Second):
		t.Fatal("the stream goes on")
	}
	send(t, "DELETE", at+hold, nil)
}

// slowJob submits a run that takes minutes.
func slowJob(t testing.TB, at string) string {
	t.Helper()
	r := send(t, "POST", at+"/v1/corners", minutes(t), "Prefer", "respond-async")
	require.Equal(t, 202, r.status, "%s", r.body)
	return r.header.Get("Location")
}

func TestCancellingStopsTheWorkAtOnce(t *testing.T) {
	at, _ := jobServer(t)
	busy := func() bool {
		return strings.Contains(string(send(t, "GET", at+"/metrics", nil).body), `railproof_lane_busy{lane="jobs"} 1`)
	}
	location := slowJob(t, at)
	require.Eventually(t, busy, time.Minute, time.Millisecond)
	before := time.Now()
	r := send(t, "DELETE", at+location, nil)
	require.Less(t, time.Since(before), 200*time.Millisecond)
	require.Equal(t, 200, r.status, "%s", r.body)
	declared(t, "cancelJob", r)
	require.Equal(t, "cancelled", r.tree(t).(map[string]any)["state"])
	for busy() {
		require.Less(t, time.Since(before), 200*time.Millisecond, "the work goes on")
	}
	t.Logf("the work had stopped %v after it was asked to", time.Since(before))
	require.Equal(t, 200, send(t, "DELETE", at+location, nil).status, "again is fine")
}

func TestResultsOfDirectAnswers(t *testing.T) {
	at := server(t)
	answer := send(t, "POST", at+"/v1/losses", []byte(minimal))
	url := at + "/v1/results/" + answer.tree(t).(map[string]any)["result_id"].(string)

	plain := send(t, "GET", url, nil, "Accept-Encoding", "identity")
	require.Equal(t, 200, plain.status)
	require.Equal(t, string(answer.body), string(plain.body))
	tag := plain.header.Get("ETag")
	require.Regexp(t, `^"res_[0-9a-f]{64}\.json"$`, tag, "strong")
	require.Contains(t, plain.header.Get("Cache-Control"), "immutable")

	squeezed := send(t, "GET", url, nil, "Accept-Encoding", "gzip")
	require.Equal(t, "gzip", squeezed.header.Get("Content-Encoding"))
	require.NotEqual(t, tag, squeezed.header.Get("ETag"), "other bytes, another tag")
	reader, err := gzip.NewReader(bytes.NewReader(squeezed.body))
	require.NoError(t, err)
	opened, err := io.ReadAll(reader)
	require.NoError(t, err)
	require.Equal(t, string(answer.body), string(opened))

	same := send(t, "GET", url, nil, "Accept-Encoding", "identity", "If-None-Match", `"x", `+tag)
	require.Equal(t, 304, same.status)
	require.Empty(t, same.body)
	require.Equal(t, tag, same.header.Get("ETag"))
	require.Equal(t, 200, send(t, "GET", url, nil, "Accept-Encoding", "identity", "If-None-Match", `"x"`).status)
	refused(t, send(t, "GET", url, nil, "Accept", "text/html"), 406, exchange.NotAcceptable)
}

func TestARepeatedRequestIsAnsweredFromTheCache(t *testing.T) {
	h := api.New(api.Options{Service: service.New(service.Options{ContractVersion: contract.Version()})})
	op := operation(t, "losses")
	first := answer(t, h, op, []byte(minimal))
	again := answer(t, h, op, []byte(strings.ReplaceAll(minimal, " ", "  ")))
	require.Equal(t, first.Body.String(), again.Body.String())
}

func operation(t testing.TB, id string) openapi.Operation {
	t.Helper()
	for _, op := range contract.Operations() {
		if op.ID == id {
			return op
		}
	}
	t.Fatal("no operation " + id)
	return openapi.Operation{}
}

// A finished job's result can be had in every form that a direct answer has, the same
// bytes.
func TestAKeptResultInOtherForms(t *testing.T) {
	at, _ := jobServer(t)
	forms := 0
	for _, text := range sortedRequests(t) {
		if text.op.ID == "reports" || !bytes.Contains(text.body, []byte("buoy-3v3")) { // one rail will do
			continue
		}
		text.body = fewer(t, text.body)
		id := send(t, "POST", at+text.op.Path, text.body, "Prefer", "respond-async, wait=60").tree(t).(map[string]any)["result_id"].(string)
		for _, form := range text.op.MediaTypes {
			direct := send(t, "POST", at+text.op.Path, text.body, "Accept", form)
			if direct.status == 406 {
				continue
			}
			kept := send(t, "GET", at+"/v1/results/"+id+"?width_px=800", nil, "Accept", form)
			if text.op.ID == "steadyState" && strings.HasPrefix(form, "image/") { // its picture needs the waveforms, which a request must ask for
				continue
			}
			require.Equal(t, 200, kept.status, "%s as %s: %.300s", text.op.ID, form, kept.body)
			require.Equal(t, form, strings.Split(kept.header.Get("Content-Type"), ";")[0])
			require.True(t, string(direct.body) == string(kept.body), "%s as %s", text.op.ID, form)
			forms++
		}
		refused(t, send(t, "GET", at+"/v1/results/"+id, nil, "Accept", "text/html"), 406, exchange.NotAcceptable)
	}
	require.Greater(t, forms, 20)

	body := exampleRequest(t, "buoy-3v3/corners.json")
	waited := send(t, "POST", at+"/v1/corners", fewer(t, body), "Prefer", "respond-async, wait=60", "Accept", "text/csv")
	require.Equal(t, 200, waited.status)
	require.Equal(t, "text/csv", waited.header.Get("Content-Type"))
}

// A report that was made by a job looks as one that was answered directly: its own
// style is not held back.
func TestAKeptReportMayShowItsStyle(t *testing.T) {
	at, _ := jobServer(t)
	request := exampleRequest(t, "buoy-3v3/reports.json")
	var tree map[string]any
	require.NoError(t, json.Unmarshal(request, &tree))
	tree["sections"] = []string{"requirement", "stage"}
	r := send(t, "POST", at+"/v1/reports", encode(t, tree), "Prefer", "respond-async")
	require.Equal(t, 202, r.status, "%s", r.body)
	job := settled(t, at+r.header.Get("Location"))
	kept := send(t, "GET", at+"/v1/results/"+job["result_id"].(string), nil)
	require.Equal(t, 200, kept.status)
	require.Contains(t, kept.header.Get("Content-Security-Policy"), "style-src 'unsafe-inline'")
	direct := send(t, "POST", at+"/v1/reports", encode(t, tree))
	require.Equal(t, direct.header.Get("Content-Security-Policy"), kept.header.Get("Content-Security-Policy"))
	require.Equal(t, string(direct.body), string(kept.body))
}
