package api

import (
	"context"
	"crypto/rand"
	"encoding/hex"
	"fmt"
	"log/slog"
	"regexp"
	"runtime/debug"
	"time"

	"github.com/labstack/echo/v4"
	"github.com/labstack/echo/v4/middleware"
)

// middleware wraps every request, outermost first.
func (a *API) middleware() []echo.MiddlewareFunc {
	return []echo.MiddlewareFunc{
		identify,
		a.metrics.measure,
		a.accessLog,
		a.recovery,
		secureHeaders,
		a.checkHost,
		a.otherOrigins(),
		middleware.GzipWithConfig(middleware.GzipConfig{Level: squeezeEffort, MinLength: worthSqueeze, Skipper: squeezesItself}),
		a.limitTime,
	}
}

const (
	eventsPath  = "/v1/jobs/:id/events"
	resultsPath = "/v1/results/:id"
)

// squeezesItself holds for answers that gzip must not touch: streams, those whose
// entity tag names their exact bytes, and what is stored compressed.
func squeezesItself(c echo.Context) bool {
	return c.Path() == eventsPath || c.Path() == resultsPath || c.Path() == assetsPath
}

const requestIDKey = "request-id"

// requestIDForm is what is taken over from a caller: nothing that could break a
// log line or a header.
var requestIDForm = regexp.MustCompile(`^[A-Za-z0-9._-]{1,64}$`)

// identify gives the request an identifier: the caller's, or a random one.
func identify(next echo.HandlerFunc) echo.HandlerFunc {
	return func(c echo.Context) error {
		id := c.Request().Header.Get(echo.HeaderXRequestID)
		if !requestIDForm.MatchString(id) {
			var b [12]byte
			rand.Read(b[:]) //nolint:errcheck // documented never to fail
			id = "req_" + hex.EncodeToString(b[:])
		}
		c.Set(requestIDKey, id)
		c.Response().Header().Set(echo.HeaderXRequestID, id)
		return next(c)
	}
}

func requestID(c echo.Context) string {
	id, _ := c.Get(requestIDKey).(string)
	return id
}

// accessLog writes one line per request, without address parameters and bodies.
func (a *API) accessLog(next echo.HandlerFunc) echo.HandlerFunc {
	return func(c echo.Context) error {
		start := time.Now()
		err := next(c)
		if err != nil {
			c.Error(err)
		}
		describeSpan(c)
		if !a.log.Enabled(c.Request().Context(), slog.LevelInfo) {
			return nil
		}
		result, _ := c.Get(resultKey).(string)
		job, _ := c.Get(jobKey).(string)
		caller, _ := c.Get(callerKey).(string)
		a.log.LogAttrs(c.Request().Context(), slog.LevelInfo, "request",
			slog.String("request_id", requestID(c)), slog.String("method", c.Request().Method), slog.String("route", c.Path()),
			slog.Int("status", c.Response().Status), slog.Duration("took", time.Since(start)), slog.Int64("bytes", c.Response().Size),
			slog.String("remote", c.RealIP()), slog.String("result_id", result), slog.String("job", job), slog.String("caller", caller))
		return nil
	}
}

// recovery turns a panic into a problem that tells nothing of the inside.
func (a *API) recovery(next echo.HandlerFunc) echo.HandlerFunc {
	return func(c echo.Context) (err error) {
		defer func() {
			if r := recover(); r != nil {
				a.log.Error("panic", "request_id", requestID(c), "route", c.Path(), "panic", fmt.Sprint(r), "stack", string(debug.Stack()))
				err = fmt.Errorf("api: panic: %v", r)
			}
		}()
		return next(c)
	}
}

// secureHeaders forbids what no answer of this server needs. Pages for people
// widen the content policy for themselves.
func secureHeaders(next echo.HandlerFunc) echo.HandlerFunc {
	return func(c echo.Context) error {
		h := c.Response().Header()
		h.Set(echo.HeaderXContentTypeOptions, "nosniff")
		h.Set(echo.HeaderXFrameOptions, "DENY")
		h.Set(echo.HeaderReferrerPolicy, "no-referrer")
		h.Set(echo.HeaderContentSecurityPolicy, "default-src 'none'; frame-ancestors 'none'")
		h.Set("Cross-Origin-Resource-Policy", "same-origin")
		longLived(c)
		return next(c)
	}
}

// limitTime ends the context when the request's time is over.
func (a *API) limitTime(next echo.HandlerFunc) echo.HandlerFunc {
	return func(c echo.Context) error {
		if c.Path() == eventsPath {
			return next(c)
		}
		ctx, cancel := context.WithTimeout(c.Request().Context(), a.deadline)
		defer cancel()
		c.SetRequest(c.Request().WithContext(ctx))
		return next(c)
	}
}
