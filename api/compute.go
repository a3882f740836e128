package api

import (
	"bytes"
	"errors"
	"fmt"
	"net/http"
	"strings"

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
		answer, problem := a.exchange.Do(c.Request().Context(), op.ID, body)
		if problem != nil {
			return refusal{problem}
		}
		form := c.Get(formKey).(string)
		text, problem := answer.Render(form)
		if problem != nil {
			return refusal{problem}
		}
		c.Set(resultKey, answer.ResultID)
		h := c.Response().Header()
		h.Set(echo.HeaderCacheControl, "no-store")
		if c.QueryParam("timings") == "true" {
			h.Set("Server-Timing", serverTiming(answer.Timings))
		}
		return c.Blob(http.StatusOK, form, text)
	}
}

// body reads the request's body up to the limit.
func (a *API) body(c echo.Context) ([]byte, *exchange.Problem) {
	r := c.Request()
	tooLarge := func() *exchange.Problem {
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
	steps := make([]string, len(timings))
	for i, t := range timings {
		steps[i] = fmt.Sprintf("%s;dur=%.3f", t.Step, t.Took.Seconds()*1e3)
	}
	return strings.Join(steps, ", ")
}
