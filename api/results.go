package api

import (
	"bytes"
	"compress/gzip"
	"net/http"
	"strconv"
	"strings"

	"github.com/labstack/echo/v4"

	"railproof/api/exchange"
)

const (
	resultLife    = 365 * 24 * 3600 // [s] a result never changes
	worthSqueeze  = 1400            // [bytes] below, gzip gains nothing
	squeezeEffort = gzip.BestSpeed
)

// getResult gives the bytes that were answered once, or the same answer in another form
// that its operation has. Entity tags are strong: each
// representation, squeezed or not, has its own.
func (a *API) getResult(c echo.Context) error {
	id := c.Param("id")
	c.Set(resultKey, id)
	answer, found := a.results.Get(id)
	if !found && a.jobs != nil {
		var err error
		if answer, err = a.jobs.Result(c.Request().Context(), id); err != nil {
			return resultRefusal(err)
		}
		a.results.Put(id, answer)
		found = true
	}
	if !found {
		return resultRefusal(nil)
	}
	forms := a.exchange.KeptForms(answer)
	form := choose(c.Request().Header.Values(echo.HeaderAccept), forms)
	if form == "" {
		return refusal{exchange.NewProblem(exchange.NotAcceptable, "this result can be had as "+strings.Join(forms, ", "))}
	}
	body, problem := exchange.Show(answer, form, view(c))
	if problem != nil {
		return refusal{problem}
	}
	styled(c, form)
	return serveResult(c, id, form, body)
}

func serveResult(c echo.Context, id, form string, body []byte) error {
	h := c.Response().Header()
	_, representation, _ := strings.Cut(form, "/")
	squeezed := len(body) >= worthSqueeze && form != "image/png" && takesGzip(c.Request().Header.Values(echo.HeaderAcceptEncoding))
	if squeezed {
		representation += "-gzip"
	}
	tag := `"` + id + "." + representation + `"`
	h.Set("ETag", tag)
	h.Set(echo.HeaderCacheControl, "private, max-age="+strconv.Itoa(resultLife)+", immutable")
	h.Set(echo.HeaderVary, echo.HeaderAccept+", "+echo.HeaderAcceptEncoding)
	if holdsStrongly(c.Request().Header.Values("If-None-Match"), tag) {
		return c.NoContent(http.StatusNotModified)
	}
	if squeezed {
		h.Set(echo.HeaderContentEncoding, "gzip")
		body = squeeze(body)
	}
	return c.Blob(http.StatusOK, form, body)
}

// holdsStrongly reports whether an If-None-Match header names the tag. A result never
// changes, so a weak tag of it is as good as a strong one.
func holdsStrongly(headers []string, tag string) bool {
	return len(headers) > 0 && holds(strings.Join(headers, ","), tag)
}

func squeeze(body []byte) []byte {
	var b bytes.Buffer
	w, err := gzip.NewWriterLevel(&b, squeezeEffort)
	if err != nil {
		panic("api: no such level of gzip")
	}
	_, _ = w.Write(body) // a buffer takes everything
	_ = w.Close()
	return b.Bytes()
}

// takesGzip reports whether Accept-Encoding takes gzip (RFC 9110, section 12.5.3).
func takesGzip(headers []string) bool {
	taken := false
	for coding := range strings.SplitSeq(strings.Join(headers, ","), ",") {
		name, parameter, _ := strings.Cut(strings.TrimSpace(coding), ";")
		name = strings.ToLower(strings.TrimSpace(name))
		q, given := strings.CutPrefix(strings.ReplaceAll(parameter, " ", ""), "q=")
		refused := false
		if given {
			v, err := strconv.ParseFloat(q, 64)
			refused = err != nil || v == 0
		}
		switch name {
		case "gzip":
			return !refused
		case "*":
			taken = !refused
		}
	}
	return taken
}

func resultRefusal(err error) error {
	if err == nil {
		return refusal{exchange.NewProblem(exchange.NotFound, "there is no such result, or it is no longer kept")}
	}
	return jobRefusal(err)
}
