package api

import (
	"log/slog"
	"net/http"
	"sync/atomic"
	"time"

	"github.com/labstack/echo/v4"

	"railproof/api/exchange"
	"railproof/openapi"
	"railproof/service"
)

// Options sets up an API. A zero field means its default.
type Options struct {
	Service  *service.Service // required
	Log      *slog.Logger     // default: none
	MaxBody  int64            // [bytes] largest request body; default 1 MiB
	Deadline time.Duration    // for one request; default 20 s
}

const (
	defaultMaxBody  = 1 << 20
	defaultDeadline = 20 * time.Second
)

// API answers HTTP requests. It is safe for concurrent use.
type API struct {
	echo     *echo.Echo
	contract *openapi.Contract
	exchange *exchange.Exchange
	log      *slog.Logger
	maxBody  int64
	deadline time.Duration
	draining atomic.Bool
}

// New returns the API of the contract.
func New(o Options) *API {
	contract := openapi.Load()
	a := &API{
		echo: echo.New(), contract: contract, exchange: exchange.New(contract, o.Service),
		log: o.Log, maxBody: o.MaxBody, deadline: o.Deadline,
	}
	if a.log == nil {
		a.log = slog.New(slog.DiscardHandler)
	}
	if a.maxBody == 0 {
		a.maxBody = defaultMaxBody
	}
	if a.deadline == 0 {
		a.deadline = defaultDeadline
	}
	a.echo.HideBanner, a.echo.HidePort = true, true
	a.echo.IPExtractor = echo.ExtractIPDirect()
	a.echo.HTTPErrorHandler = a.refuse
	a.echo.Use(a.middleware()...)
	a.routes()
	return a
}

// ServeHTTP answers one request.
func (a *API) ServeHTTP(w http.ResponseWriter, r *http.Request) { a.echo.ServeHTTP(w, r) }

// Drain makes /readyz say that no new work should be sent; requests that come
// all the same are answered.
func (a *API) Drain() { a.draining.Store(true) }
