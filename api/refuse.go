package api

import (
	"encoding/json"
	"errors"
	"net/http"
	"strconv"

	"github.com/labstack/echo/v4"

	"railproof/api/exchange"
)

// refusal carries a problem up to the one place that writes it.
type refusal struct{ problem *exchange.Problem }

func (r refusal) Error() string { return string(r.problem.Kind) }

// refuse writes the problem of an error.
func (a *API) refuse(err error, c echo.Context) {
	if c.Response().Committed {
		return
	}
	p := a.problem(err, c)
	if p.Cause != nil {
		a.log.Error("internal fault", "request_id", requestID(c), "route", c.Path(), "cause", p.Cause)
	}
	p.Instance = requestID(c)
	p.Type = baseURL(c.Request()) + p.Type
	body, err := json.Marshal(p)
	if err != nil {
		panic("api: a problem that cannot be encoded")
	}
	h := c.Response().Header()
	h.Set(echo.HeaderCacheControl, "no-store")
	if p.RetryAfter > 0 {
		h.Set(echo.HeaderRetryAfter, strconv.Itoa(p.RetryAfter))
	}
	c.Response().Status = p.Status
	if c.Request().Method == http.MethodHead {
		_ = c.NoContent(p.Status) // the client is gone: nobody to tell
		return
	}
	_ = c.Blob(p.Status, "application/problem+json", append(body, '\n')) // as above
}

// problem says what is wrong in the contract's terms.
func (a *API) problem(err error, c echo.Context) *exchange.Problem {
	if r, ok := errors.AsType[refusal](err); ok {
		return r.problem
	}
	switch {
	case errors.Is(err, echo.ErrNotFound):
		return exchange.NewProblem(exchange.NotFound, "nothing stands at this path")
	case errors.Is(err, echo.ErrMethodNotAllowed):
		return exchange.NewProblem(exchange.MethodNotAllowed, "allowed: "+c.Response().Header().Get(echo.HeaderAllow))
	}
	p := exchange.NewProblem(exchange.Internal, "")
	p.Cause = err
	return p
}

// longestHost bounds the host name that is repeated in a body.
const longestHost = 190

// baseURL returns the address under which the client reached this server; nothing
// where it did not say.
func baseURL(r *http.Request) string {
	if r.Host == "" || len(r.Host) > longestHost {
		return ""
	}
	scheme := "http"
	if r.TLS != nil {
		scheme = "https"
	}
	return scheme + "://" + r.Host
}
