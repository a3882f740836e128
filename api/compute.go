package api

import (
	"bytes"
	"errors"
	"fmt"
	"io"
	"net/http"
	"strconv"

	"github.com/labstack/echo/v4"

	"railproof/api/exchange"
	"railproof/openapi"
)

// resultKey is where compute leaves the result's identifier for the log.
const resultKey = "result"

// compute answers an operation that takes a body.
func (a *API) compute(op openapi.Operation) echo.HandlerFunc {
	return func(c echo.Context) error {
		if why := jsonBody(c); why != "" {
			return refusal{exchange.NewProblem(exchange.UnsupportedMedia, why)}
		}
		body, problem := a.body(c)
		if problem != nil {
			return refusal{problem}
		}
		request, problem := a.exchange.Read(op.ID, body)
		if problem != nil {
			return refusal{problem}
		}
		if p := preferred(c.Request().Header.Values("Prefer")); p.async && a.jobs != nil && canDefer(op) {
			return a.deferred(c, op, request, p)
		}
		form := c.Get(formKey).(string)
		c.Set(resultKey, request.ResultID)
		explained := c.QueryParam("explain") == "true" // more than the result that is kept
		request.Explain = explained
		drawn := exchange.Drawn(form)
		if drawn {
			request.Draw(view(c))
		}
		styled(c, form)
		if kept, found := a.results.Get(request.ResultID); found && kept.Media == form && !explained && c.QueryParam("timings") != "true" {
			return sent(c, form, kept.Body, nil)
		}
		answer, problem := a.exchange.Answer(c.Request().Context(), request)
		if problem != nil {
			return refusal{problem}
		}
		text, problem := answer.Render(form)
		if problem != nil {
			return refusal{problem}
		}
		if kept, problem := answer.Kept(); problem == nil && !explained && !drawn {
			a.results.Put(answer.ResultID, kept)
		}
		return sent(c, form, text, answer.Timings)
	}
}

// styled lets pictures and pages, which carry their style with them, be shown as they
// are.
func styled(c echo.Context, form string) {
	if form != echo.MIMEApplicationJSON {
		c.Response().Header().Set(echo.HeaderContentSecurityPolicy, "default-src 'none'; style-src 'unsafe-inline'; frame-ancestors 'none'")
	}
}

// sent sends an answer.
func sent(c echo.Context, form string, text []byte, timings []exchange.Timing) error {
	h := c.Response().Header()
	h.Set(echo.HeaderCacheControl, "no-store")
	if c.QueryParam("timings") == "true" {
		h.Set("Server-Timing", serverTiming(timings))
	}
	return c.Blob(http.StatusOK, form, text)
}

// mostDiscarded is what is read of a body that is refused: many clients look for an
// answer only after all of it is written, and find the connection reset instead.
const mostDiscarded = 16 << 20 // [bytes]

// body reads the request's body up to the limit.
func (a *API) body(c echo.Context) ([]byte, *exchange.Problem) {
	r := c.Request()
	tooLarge := func() *exchange.Problem {
		if r.Header.Get("Expect") == "" { // else the client waits to be asked for it
			_, _ = io.CopyN(io.Discard, r.Body, mostDiscarded)
		}
		return exchange.NewProblem(exchange.TooLarge, fmt.Sprintf("at most %d bytes are taken", a.maxBody))
	}
	if r.ContentLength > a.maxBody {
		return nil, tooLarge()
	}
	var arrived bytes.Buffer
	if r.ContentLength > 0 {
		arrived.Grow(int(r.ContentLength) + bytes.MinRead)
	}
	_, err := arrived.ReadFrom(http.MaxBytesReader(c.Response(), r.Body, a.maxBody))
	if _, over := errors.AsType[*http.MaxBytesError](err); over {
		return nil, tooLarge()
	}
	if err != nil {
		return nil, exchange.NewProblem(exchange.Malformed, "the body did not arrive completely")
	}
	return arrived.Bytes(), nil
}

// serverTiming writes the milliseconds of each step.
func serverTiming(timings []exchange.Timing) string {
	b := make([]byte, 0, 160)
	for i, t := range timings {
		if i > 0 {
			b = append(b, ", "...)
		}
		b = append(append(b, t.Step...), ";dur="...)
		b = strconv.AppendFloat(b, t.Took.Seconds()*1e3, 'f', 3, 64)
	}
	return string(b)
}
