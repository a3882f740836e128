package api

import (
	"fmt"
	"net"
	"net/http"
	"slices"
	"strconv"
	"strings"
	"time"

	"github.com/labstack/echo/v4"
	"github.com/labstack/echo/v4/middleware"

	"railproof/api/exchange"
	"railproof/openapi"
	"railproof/service/access"
)

// Access says who may call, and how often. The zero value lets everybody.
type Access struct {
	Keys         *access.Keys    // nil: no keys are asked for
	Certificates access.Scope    // of a client whose certificate the TLS layer has verified; None: that is not enough
	Limiter      *access.Limiter // nil: no limit
	Hosts        []string        // names under which the server may be reached; nil: any
	Origins      []string        // that browsers may call from; nil: none
	Proxies      []*net.IPNet    // whose X-Forwarded-For is believed; nil: nobody's
}

// unlimited are the operations that watch the server: they are never turned away for
// being asked often.
var unlimited = []string{"getHealth", "getReadiness", "getMetrics"}

// scopeOf returns what a caller of the operation must be allowed. Those that the
// contract gives no 401 are for everybody.
func scopeOf(op openapi.Operation) access.Scope {
	switch {
	case !slices.Contains(op.Statuses, http.StatusUnauthorized):
		return access.None
	case op.ID == "getMetrics":
		return access.Admin
	case op.Method == http.MethodGet:
		return access.Read
	}
	return access.Compute
}

// callerKey is where the caller's name is left for the log.
const callerKey = "caller"

// guard lets through who may call the operation, as often as is allowed.
func (a *API) guard(op openapi.Operation, next echo.HandlerFunc) echo.HandlerFunc {
	need, limited := scopeOf(op), !slices.Contains(unlimited, op.ID)
	return func(c echo.Context) error {
		caller, known := a.caller(c.Request())
		if known {
			c.Set(callerKey, caller.Name)
		}
		if limited && a.access.Limiter != nil {
			if problem := a.limit(c, caller, known); problem != nil {
				return refusal{problem}
			}
		}
		if problem := a.permit(c, need, caller, known); problem != nil {
			return refusal{problem}
		}
		return next(c)
	}
}

// caller finds who calls, by key or by certificate.
func (a *API) caller(r *http.Request) (access.Caller, bool) {
	if a.access.Keys != nil {
		if scheme, key, found := strings.Cut(r.Header.Get(echo.HeaderAuthorization), " "); found && strings.EqualFold(scheme, "bearer") {
			return a.access.Keys.Caller(strings.TrimSpace(key))
		}
	}
	if a.access.Certificates > access.None && r.TLS != nil && len(r.TLS.VerifiedChains) > 0 {
		return access.Caller{Name: r.TLS.VerifiedChains[0][0].Subject.CommonName, Scope: a.access.Certificates}, true
	}
	return access.Caller{}, false
}

func (a *API) permit(c echo.Context, need access.Scope, caller access.Caller, known bool) *exchange.Problem {
	if need == access.None || a.access.Keys == nil && a.access.Certificates == access.None {
		return nil
	}
	h := c.Response().Header()
	if !known {
		h.Set(echo.HeaderWWWAuthenticate, `Bearer realm="railproof"`)
		return exchange.NewProblem(exchange.Unauthorized, "send a key as Authorization: Bearer")
	}
	if caller.Scope < need {
		h.Set(echo.HeaderWWWAuthenticate, fmt.Sprintf(`Bearer realm="railproof", error="insufficient_scope", scope=%q`, need))
		return exchange.NewProblem(exchange.Forbidden, fmt.Sprintf("the key %s has the scope %s; this needs %s", caller.Name, caller.Scope, need))
	}
	return nil
}

// limit counts the request against the caller's quota and tells what is left of it.
func (a *API) limit(c echo.Context, caller access.Caller, known bool) *exchange.Problem {
	name := "address " + c.RealIP()
	if known {
		name = "key " + caller.Name
	}
	quota := a.access.Limiter.Take(name, time.Now())
	most, window := a.access.Limiter.Policy()
	h := c.Response().Header()
	h.Set("RateLimit-Policy", fmt.Sprintf(`"requests";q=%d;w=%d`, most, ceilSeconds(window)))
	h.Set("RateLimit", fmt.Sprintf(`"requests";r=%d;t=%d`, quota.Remaining, ceilSeconds(quota.Restored)))
	if quota.Allowed {
		return nil
	}
	return later(exchange.NewProblem(exchange.TooMany, "the quota of requests is used up; RateLimit tells when it is restored"), max(1, ceilSeconds(quota.Retry)))
}

func ceilSeconds(d time.Duration) int { return int((d + time.Second - 1) / time.Second) }

// checkHost refuses requests under a name that this server does not have: a page of
// another site could point its own name at a local address and so reach a server
// that asks for no key.
func (a *API) checkHost(next echo.HandlerFunc) echo.HandlerFunc {
	return func(c echo.Context) error {
		name := c.Request().Host
		if host, _, err := net.SplitHostPort(name); err == nil {
			name = host
		}
		name = strings.Trim(name, "[]")
		if a.access.Hosts != nil && !slices.ContainsFunc(a.access.Hosts, func(h string) bool { return strings.EqualFold(h, name) }) {
			return refusal{exchange.NewProblem(exchange.Malformed, "this server does not go by the name in Host")}
		}
		return next(c)
	}
}

// otherOrigins lets browsers call from the origins that were named.
func (a *API) otherOrigins() echo.MiddlewareFunc {
	if len(a.access.Origins) == 0 {
		return func(next echo.HandlerFunc) echo.HandlerFunc { return next }
	}
	return middleware.CORSWithConfig(middleware.CORSConfig{
		AllowOrigins:  a.access.Origins,
		AllowMethods:  []string{http.MethodGet, http.MethodHead, http.MethodPost, http.MethodDelete},
		AllowHeaders:  []string{echo.HeaderAuthorization, echo.HeaderContentType, "Prefer", "Last-Event-ID", "If-None-Match", echo.HeaderXRequestID},
		ExposeHeaders: []string{echo.HeaderLocation, echo.HeaderRetryAfter, "ETag", preferenceApplied, "RateLimit", "RateLimit-Policy", "Server-Timing", echo.HeaderXRequestID},
		MaxAge:        int((10 * time.Minute).Seconds()),
	})
}

// addressOf finds the address of a caller: that of the connection, unless it comes
// from a proxy that is believed.
func addressOf(proxies []*net.IPNet) echo.IPExtractor {
	if len(proxies) == 0 {
		return echo.ExtractIPDirect()
	}
	trust := []echo.TrustOption{echo.TrustLoopback(false), echo.TrustLinkLocal(false), echo.TrustPrivateNet(false)}
	for _, n := range proxies {
		trust = append(trust, echo.TrustIPRange(n))
	}
	return echo.ExtractIPFromXFFHeader(trust...)
}

// longLived asks browsers to come back by TLS only.
func longLived(c echo.Context) {
	if c.Request().TLS != nil {
		c.Response().Header().Set(echo.HeaderStrictTransportSecurity, "max-age="+strconv.Itoa(resultLife))
	}
}
