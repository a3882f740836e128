//go:build e2e

package browser

import (
	"context"
	"net/http/httptest"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/api"
	"railproof/api/exchange"
	"railproof/openapi"
	"railproof/service"
	"railproof/service/jobs"
)

func server(t *testing.T) string {
	t.Helper()
	contract := openapi.Load()
	computing := service.New(service.Options{ContractVersion: contract.Version()})
	board, err := jobs.Open(t.Context(), jobs.Options{Executor: exchange.New(contract, computing).Executor(), Engine: computing.Engine().Platform})
	require.NoError(t, err)
	a := api.New(api.Options{Service: computing, Jobs: board})
	s := httptest.NewServer(a)
	t.Cleanup(func() {
		a.Drain()
		s.Close()
		require.NoError(t, board.Close(context.WithoutCancel(t.Context())))
	})
	return s.URL
}

// clean holds if the page asked nobody but the server and the browser has nothing to
// complain about.
func clean(t *testing.T, p *Page, server string) {
	t.Helper()
	for _, r := range p.Requests() {
		own := strings.HasPrefix(r, server+"/") || strings.HasPrefix(r, "data:") || strings.HasPrefix(r, "blob:"+server) || r == "about:blank" || r == "about:srcdoc"
		require.True(t, own, "a request left for %s", r)
	}
	require.Empty(t, p.Faults())
}

// look keeps a picture of the page in the folder that BROWSER_PICTURES names.
func look(p *Page, name string) {
	if dir := os.Getenv("BROWSER_PICTURES"); dir != "" {
		p.Picture(filepath.Join(dir, name+".png"))
	}
}

func TestFirstRequestFromTheConsole(t *testing.T) {
	at, p := server(t), Open(t)
	p.Go(at + "/docs")
	look(p, "overview")
	p.Eval(`document.querySelector('main a[href="/docs/console"]').click()`, nil)
	p.Until(`location.pathname === "/docs/console" && document.readyState === "complete" && document.getElementById("body").value.includes("inductance_h")`)
	var shell string
	p.Eval(`document.getElementById("shell").textContent`, &shell)
	require.Contains(t, shell, at+"/v1/losses")
	p.Eval(`document.getElementById("send").click()`, nil)
	p.Until(`document.getElementById("state").textContent.startsWith("200: ok")`)
	var shown string
	p.Eval(`document.getElementById("shown").textContent`, &shown)
	require.Contains(t, shown, `"efficiency_ratio"`)
	look(p, "console-answer")
	clean(t, p, at)
}

func TestConsoleByKeyboard(t *testing.T) {
	at, p := server(t), Open(t)
	p.Go(at + "/docs/console#steadyState")
	p.Until(`document.getElementById("body").value.includes("inductance_h")`)
	reach := func(id string) {
		t.Helper()
		for range 30 {
			var here string
			p.Press("Tab")
			p.Eval(`document.activeElement.id || document.activeElement.parentElement.id`, &here)
			if here == id {
				return
			}
		}
		t.Fatalf("Tab does not reach %s", id)
	}
	p.Press("Tab")
	var skip string
	p.Eval(`document.activeElement.className`, &skip)
	require.Equal(t, "skip", skip, "the first stop leads past the bar")
	reach("operation")
	reach("rail")
	reach("body")
	reach("send")
	p.Press("Enter")
	p.Until(`document.getElementById("state").textContent.startsWith("200")`)
	reach("shown") // its first text can be scrolled by keys
	clean(t, p, at)
}

func TestConsolePointsAtFaults(t *testing.T) {
	at, p := server(t), Open(t)
	p.Go(at + "/docs/console#losses")
	p.Until(`document.getElementById("body").value.includes("inductance_h")`)
	p.Eval(`(() => { const b = document.getElementById("body"); const d = JSON.parse(b.value); d.stage.inductor.inductance_h = "much"; b.value = JSON.stringify(d, null, 2); b.focus(); })()`, nil)
	p.Press("Enter", "Control")
	p.Until(`document.getElementById("state").textContent.startsWith("422")`)
	var pointer, selected string
	p.Eval(`document.querySelector("#faults button").textContent`, &pointer)
	require.Equal(t, "/stage/inductor/inductance_h", pointer)
	p.Eval(`document.querySelector("#faults button").click()`, nil)
	p.Eval(`(() => { const b = document.getElementById("body"); return b.value.slice(b.selectionStart, b.selectionEnd); })()`, &selected)
	require.Equal(t, `"much"`, selected)
	look(p, "console-fault")
	for _, fault := range p.Faults() {
		require.Contains(t, fault, "422", "only the refusal itself is noted")
	}
}

func TestConsoleShowsPictures(t *testing.T) {
	at, p := server(t), Open(t)
	p.Go(at + "/docs/console#steadyState")
	p.Until(`document.getElementById("body").value.includes("inductance_h")`)
	p.Eval(`document.getElementById("form").value = "image/svg+xml"; document.getElementById("send").click()`, nil)
	p.Until(`(() => { const i = document.querySelector("#shown img"); return i && i.complete && i.naturalWidth > 100; })()`)
	look(p, "console-picture")
	clean(t, p, at)
}

func TestStageIsCarriedOn(t *testing.T) {
	at, p := server(t), Open(t)
	p.Go(at + "/docs/console#sizing")
	p.Until(`document.getElementById("body").value.includes("requirement")`)
	p.Eval(`document.getElementById("send").click()`, nil)
	p.Until(`!document.getElementById("onward").hidden`)
	p.Eval(`document.getElementById("next").value = "losses"; document.getElementById("carry").click()`, nil)
	p.Until(`document.getElementById("note").textContent !== "" && document.getElementById("body").value.includes('"assumed": true')`)
	p.Eval(`document.getElementById("send").click()`, nil)
	p.Until(`document.getElementById("state").textContent.startsWith("200: ok")`)
	clean(t, p, at)
}

func TestConsoleFollowsAJob(t *testing.T) {
	at, p := server(t), Open(t)
	p.Go(at + "/docs/console#corners")
	p.Until(`document.getElementById("body").value.includes("inductance_h")`)
	p.Eval(`document.getElementById("deferred").click(); document.getElementById("send").click()`, nil)
	p.Until(`document.getElementById("state").textContent.startsWith("200: ok")`)
	var progress float64
	p.Eval(`document.getElementById("progress").value`, &progress)
	require.InDelta(t, 1, progress, 0, "the job was followed to its end")
	clean(t, p, at)
}

func TestConsoleShowsReportsWithoutTheirScripts(t *testing.T) {
	at, p := server(t), Open(t)
	p.Go(at + "/docs/console#reports")
	p.Until(`document.getElementById("body").value.includes("inductance_h")`)
	p.Eval(`document.getElementById("send").click()`, nil)
	p.Until(`document.querySelector("#shown iframe")`)
	var sandbox string
	p.Eval(`document.querySelector("#shown iframe").getAttribute("sandbox")`, &sandbox)
	require.Empty(t, sandbox, "nothing is allowed")
	p.Until(`document.querySelector("#shown iframe").dataset.shown`)
	look(p, "console-report")
	clean(t, p, at)
}

func TestContractIsLaidOut(t *testing.T) {
	at, p := server(t), Open(t)
	p.Go(at + "/docs/contract")
	p.Until(`!document.getElementById("loading") && document.querySelectorAll("#contract h2").length > 10`)
	var text string
	p.Eval(`document.getElementById("contract").innerText`, &text)
	require.Contains(t, text, "Exact periodic steady state")
	look(p, "contract")
	clean(t, p, at)
}

func TestStillPages(t *testing.T) {
	at, p := server(t), Open(t)
	for _, page := range []string{"/docs", "/docs/quantities", "/docs/rule-packs", "/docs/problems/schema", "/docs/requests"} {
		p.Go(at + page)
		var title, width string
		p.Eval(`document.querySelector("h1").textContent`, &title)
		require.NotEmpty(t, title, page)
		p.Eval(`document.documentElement.scrollWidth > document.documentElement.clientWidth ? "too wide" : ""`, &width)
		require.Empty(t, width, page)
		look(p, strings.ReplaceAll(strings.TrimPrefix(page, "/"), "/", "-"))
	}
	var anchor string
	p.Go(at + "/docs/quantities#output_ripple_pp_v")
	p.Eval(`document.querySelector(":target").innerText`, &anchor)
	require.Contains(t, anchor, "peak-to-peak output voltage")
	clean(t, p, at)
}
