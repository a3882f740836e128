package api

import (
	"context"
	"log/slog"
	"net/http"
	"sync/atomic"
	"time"

	"github.com/labstack/echo/v4"

	"railproof/api/exchange"
	"railproof/openapi"
	"railproof/service"
	"railproof/service/jobs"
	"railproof/service/results"
)

// Options sets up an API. A zero field means its default.
type Options struct {
	Service  *service.Service // required
	Log      *slog.Logger     // default: none
	MaxBody  int64            // [bytes] largest request body; default 1 MiB
	Deadline time.Duration    // for one request; default 20 s
	Jobs     *jobs.Board      // nil: there are no jobs, and nothing is deferred
	Results  int64            // [bytes] of answers kept in memory; default 32 MiB, below 0 none
	Access   Access
}

const (
	defaultMaxBody  = 1 << 20
	defaultDeadline = 20 * time.Second
	defaultResults  = 32 << 20
)

// API answers HTTP requests. It is safe for concurrent use.
type API struct {
	echo     *echo.Echo
	contract *openapi.Contract
	exchange *exchange.Exchange
	log      *slog.Logger
	maxBody  int64
	deadline time.Duration
	jobs     *jobs.Board
	results  *results.Cache
	access   Access
	metrics  *metrics
	streams  atomic.Int64    // open event streams
	ending   context.Context // ends when the server drains
	drain    context.CancelFunc
}

// New returns the API of the contract.
func New(o Options) *API {
	contract := openapi.Load()
	a := &API{
		echo: echo.New(), contract: contract, exchange: exchange.New(contract, o.Service),
		log: o.Log, maxBody: o.MaxBody, deadline: o.Deadline, jobs: o.Jobs, access: o.Access,
	}
	a.ending, a.drain = context.WithCancel(context.Background())
	if o.Results == 0 {
		o.Results = defaultResults
	}
	a.results = results.New(o.Results)
	if a.log == nil {
		a.log = slog.New(slog.DiscardHandler)
	}
	if a.maxBody == 0 {
		a.maxBody = defaultMaxBody
	}
	if a.deadline == 0 {
		a.deadline = defaultDeadline
	}
	a.metrics = newMetrics(o.Service, o.Jobs, a.results, func() float64 { return float64(a.streams.Load()) })
	a.echo.HideBanner, a.echo.HidePort = true, true
	a.echo.IPExtractor = addressOf(o.Access.Proxies)
	a.echo.HTTPErrorHandler = a.refuse
	a.echo.Use(a.middleware()...)
	a.routes()
	return a
}

// ServeHTTP answers one request.
func (a *API) ServeHTTP(w http.ResponseWriter, r *http.Request) { a.echo.ServeHTTP(w, r) }

// Drain makes /readyz say that no new work should be sent; requests that come
// all the same are answered. Event streams end, and their clients come back
// elsewhere.
func (a *API) Drain() { a.drain() }
