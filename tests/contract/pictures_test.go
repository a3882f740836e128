package contract

import (
	"bytes"
	"encoding/xml"
	"errors"
	"image/png"
	"io"
	"io/fs"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/openapi"
)

func TestPicturesByAccept(t *testing.T) {
	at := server(t)
	for _, c := range []struct{ file, path, title string }{
		{"steady-state", "/v1/steady-state", "buoy-5v0: steady state over one period"},
		{"losses", "/v1/losses?picture=breakdown", "buoy-5v0: losses by part and mechanism"},
		{"sizing", "/v1/sizing", "buoy-5v0: windows of values"},
		{"corners", "/v1/corners?width_px=640", "buoy-5v0: worst case of each quantity"},
		{"corners", "/v1/corners?picture=tornado&quantity=output_ripple_pp_v", "buoy-5v0: what moves the output ripple, peak to peak"},
		{"corners", "/v1/corners?picture=histogram&quantity=efficiency_ratio", "buoy-5v0: distribution of efficiency"},
	} {
		t.Run(c.path, func(t *testing.T) {
			body := fewer(t, exampleRequest(t, "buoy-5v0/"+c.file+".json"))
			r := send(t, "POST", at+c.path, body, "Accept", "image/svg+xml")
			require.Equal(t, 200, r.status, "%s", r.body)
			require.Equal(t, "image/svg+xml", r.header.Get("Content-Type"))
			require.Equal(t, "default-src 'none'; style-src 'unsafe-inline'; frame-ancestors 'none'", r.header.Get("Content-Security-Policy"))
			require.Contains(t, r.header.Values("Vary"), "Accept")
			var picture struct {
				Title string `xml:"title"`
				Desc  string `xml:"desc"`
			}
			require.NoError(t, xml.Unmarshal(r.body, &picture))
			require.Equal(t, c.title, picture.Title)
			require.Greater(t, len(picture.Desc), 40)
			require.Equal(t, string(r.body), string(send(t, "POST", at+c.path, body, "Accept", "image/svg+xml").body), "same request, same bytes")
			dots := send(t, "POST", at+c.path, body, "Accept", "image/png")
			require.Equal(t, 200, dots.status, "%s", dots.body)
			_, err := png.Decode(bytes.NewReader(dots.body))
			require.NoError(t, err)
		})
	}
}

func TestPicturesThatCannotBe(t *testing.T) {
	at := server(t)
	body, err := fs.ReadFile(openapi.Examples(), "buoy-5v0/losses.json")
	require.NoError(t, err)
	for _, query := range []string{"?picture=pie", "?picture=map", "?item=17", "?width_px=20", "?quantity=Robert%27"} {
		r := send(t, "POST", at+"/v1/losses"+query, body, "Accept", "image/png")
		require.Equal(t, 400, r.status, "%s: %s", query, r.body)
		declared(t, "losses", r)
	}
	require.Equal(t, 406, send(t, "POST", at+"/v1/rule-checks", []byte("{}"), "Accept", "image/png").status)
}

// A picture of the steady state asks for waveforms that the request does not; the
// result that JSON names must not change by it.
func TestAPictureLeavesTheResultAlone(t *testing.T) {
	at := server(t)
	body, err := fs.ReadFile(openapi.Examples(), "buoy-5v0/steady-state.json")
	require.NoError(t, err)
	before := send(t, "POST", at+"/v1/steady-state", body)
	send(t, "POST", at+"/v1/steady-state", body, "Accept", "image/svg+xml")
	require.Equal(t, string(before.body), string(send(t, "POST", at+"/v1/steady-state", body).body))
}

func TestReportKeepsTextText(t *testing.T) {
	at := server(t)
	body := fewer(t, exampleRequest(t, "mast-12v0/reports.json"))
	const hostile = `<script>fetch('//x')</script><img src=x onerror=alert(1)>`
	body = bytes.ReplaceAll(body, []byte("INVENTED-PWM-3"), []byte(hostile))
	body = bytes.ReplaceAll(body, []byte(`"name":"mast-12v0"`), []byte(`"name":"`+hostile+`"`))
	r := send(t, "POST", at+"/v1/reports", body)
	require.Equal(t, 200, r.status, "%.400s", r.body)
	require.Equal(t, "text/html", r.header.Get("Content-Type"))
	page := string(r.body)
	require.True(t, strings.Contains(page, "&lt;script&gt;"))
	onlyText(t, page[strings.Index(page, "<main>"):strings.Index(page, "</body>")])
	for _, section := range []string{"requirement", "stage", "sizing", "operating-figures", "losses", "worst-case", "findings", "assumptions", "reproduction"} {
		require.True(t, strings.Contains(page, `<section id="`+section+`">`), section)
	}
}

func TestReportHasTheSectionsAskedFor(t *testing.T) {
	at := server(t)
	body, err := fs.ReadFile(openapi.Examples(), "buoy-3v3/reports.json")
	require.NoError(t, err)
	body = bytes.Replace(body, []byte("{"), []byte(`{"sections": ["losses", "reproduction"],`), 1)
	r := send(t, "POST", at+"/v1/reports", body)
	require.Equal(t, 200, r.status, "%.400s", r.body)
	require.Equal(t, 2, strings.Count(string(r.body), "<section"))
	require.False(t, strings.Contains(string(r.body), "POST /v1/corners"))
}

// onlyText checks that markup is closed, loads nothing and runs nothing.
func onlyText(t *testing.T, markup string) {
	t.Helper()
	d := xml.NewDecoder(strings.NewReader(markup))
	for {
		token, err := d.Token()
		if errors.Is(err, io.EOF) {
			return
		}
		require.NoError(t, err, "every element is closed")
		e, starts := token.(xml.StartElement)
		if !starts {
			continue
		}
		require.NotContains(t, []string{"script", "img", "iframe", "object", "embed", "link", "image", "use", "foreignObject", "form", "base", "meta"}, e.Name.Local)
		for _, a := range e.Attr {
			require.False(t, strings.HasPrefix(a.Name.Local, "on"), "%s of %s", a.Name.Local, e.Name.Local)
			if a.Name.Local == "href" {
				require.True(t, strings.HasPrefix(a.Value, "#"), a.Value)
			}
			require.NotContains(t, a.Value, "url(")
		}
	}
}
