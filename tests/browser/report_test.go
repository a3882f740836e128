//go:build e2e

package browser

import (
	"bytes"
	"encoding/base64"
	"fmt"
	"io"
	"io/fs"
	"net/http"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/openapi"
)

const hostile = `<script>document.title='run'</script><img src=x onerror=document.title=1>`

// reportOf computes the report of a rail whose inductor has a hostile name, and
// returns the page's address.
func reportOf(t *testing.T, at, rail string) string {
	t.Helper()
	body, err := fs.ReadFile(openapi.Examples(), rail+"/reports.json")
	require.NoError(t, err)
	i := bytes.Index(body, []byte("INVENTED-L"))
	require.Positive(t, i)
	end := i + bytes.IndexByte(body[i:], '"')
	body = bytes.ReplaceAll(body, body[i:end], []byte(hostile))
	request, err := http.NewRequestWithContext(t.Context(), http.MethodPost, at+"/v1/reports", bytes.NewReader(body))
	require.NoError(t, err)
	request.Header.Set("Content-Type", "application/json")
	response, err := http.DefaultClient.Do(request)
	require.NoError(t, err)
	defer response.Body.Close()
	page, err := io.ReadAll(response.Body)
	require.NoError(t, err)
	require.Equal(t, 200, response.StatusCode, "%.300s", page)
	file := filepath.Join(t.TempDir(), "report.html")
	require.NoError(t, os.WriteFile(file, page, 0o600))
	return "file://" + file
}

func TestReportOnScreenAndPaper(t *testing.T) {
	at := server(t)
	for _, rail := range []string{"buoy-5v0", "buoy-3v3", "mast-12v0"} {
		t.Run(rail, func(t *testing.T) {
			address := reportOf(t, at, rail)
			p := Open(t)
			p.Go(address)
			look(p, "report-"+rail)
			for _, r := range p.Requests() {
				require.True(t, r == address || r == "about:blank", "the page asked for %s", r)
			}
			require.Empty(t, p.Faults())
			var title string
			p.Eval("document.title", &title)
			require.Equal(t, "Proof of "+rail, title, "nothing ran")
			var elements int
			p.Eval("document.querySelectorAll('script,img,link,iframe,object').length", &elements)
			require.Zero(t, elements)
			var text string
			p.Eval("document.getElementById('stage').innerText", &text)
			require.True(t, strings.Contains(text, hostile), "the name stands there as text")
			for _, paper := range []struct {
				name         string
				wide, tall   float64 // [in]
				printedWidth int     // [px] between the margins
			}{{"A4", 8.27, 11.69, 688}, {"Letter", 8.5, 11, 710}} {
				p.fits(paper.name, paper.printedWidth)
				p.prints(t, rail, paper.name, paper.wide, paper.tall)
			}
		})
	}
}

// fits checks that nothing is wider than the paper.
func (p *Page) fits(name string, width int) {
	p.call("Emulation.setEmulatedMedia", map[string]any{"media": "print"})
	p.call("Emulation.setDeviceMetricsOverride", map[string]any{"width": width, "height": 1000, "deviceScaleFactor": 1, "mobile": false})
	var wide []string
	p.Eval(`[...document.querySelectorAll('main *')].filter(e => e.getBoundingClientRect().right > `+fmt.Sprint(width)+`+1).map(e => e.tagName+' '+e.textContent.slice(0,60))`, &wide)
	require.Empty(p.t, wide, "wider than %s", name)
	p.call("Emulation.clearDeviceMetricsOverride", map[string]any{})
	p.call("Emulation.setEmulatedMedia", map[string]any{"media": ""})
}

// prints checks that what is on screen is on paper as well, to the last cell of
// every table.
func (p *Page) prints(t *testing.T, rail, name string, wide, tall float64) {
	t.Helper()
	var printed struct{ Data string }
	p.into(p.call("Page.printToPDF", map[string]any{"paperWidth": wide, "paperHeight": tall, "preferCSSPageSize": true, "printBackground": true}), &printed)
	pdf, err := base64.StdEncoding.DecodeString(printed.Data)
	require.NoError(t, err)
	file := filepath.Join(t.TempDir(), rail+"-"+name+".pdf")
	require.NoError(t, os.WriteFile(file, pdf, 0o600))
	raw, err := exec.CommandContext(t.Context(), "pdftotext", "-raw", file, "-").Output()
	require.NoError(t, err)
	paper := dense(string(raw))
	var last []string
	p.Eval(`[...document.querySelectorAll('tr')].map(r => r.lastElementChild.textContent)`, &last)
	require.Greater(t, len(last), 100)
	for _, text := range last {
		require.True(t, strings.Contains(paper, dense(text)), "%s: %q is not on paper", name, text)
	}
}

// dense leaves letters and figures only: where lines break does not matter.
func dense(s string) string {
	return strings.Map(func(r rune) rune {
		if r >= '0' && r <= '9' || r >= 'a' && r <= 'z' || r >= 'A' && r <= 'Z' {
			return r
		}
		return -1
	}, s)
}
