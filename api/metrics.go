package api

import (
	"context"
	"net/http"
	"runtime"
	"runtime/debug"
	"strconv"
	"time"

	"github.com/labstack/echo/v4"
	"github.com/prometheus/client_golang/prometheus"
	"github.com/prometheus/client_golang/prometheus/collectors"
	"github.com/prometheus/client_golang/prometheus/promhttp"

	"railproof/service"
	"railproof/service/jobs"
	"railproof/service/results"
)

// metrics are what operators see. Their names are listed in the page operations; a
// test holds the two together.
type metrics struct {
	registry *prometheus.Registry
	duration *prometheus.HistogramVec
	inFlight prometheus.Gauge
}

// durations are the bounds of the histogram of latencies, around what is promised:
// 0.3 ms for a point, 25 ms beside a long run.
var durations = []float64{0.0003, 0.001, 0.003, 0.01, 0.025, 0.1, 0.3, 1, 3, 10, 30}

func newMetrics(s *service.Service, b *jobs.Board, kept *results.Cache, streams func() float64) *metrics {
	m := &metrics{
		registry: prometheus.NewRegistry(),
		duration: prometheus.NewHistogramVec(prometheus.HistogramOpts{
			Name: "railproof_http_request_duration_seconds", Help: "Time from the arrival of a request's header to the end of its answer.", Buckets: durations,
		}, []string{"method", "route", "status"}),
		inFlight: prometheus.NewGauge(prometheus.GaugeOpts{Name: "railproof_http_requests_in_flight", Help: "Requests being answered."}),
	}
	m.registry.MustRegister(m.duration, m.inFlight, &observed{s, b, kept, streams}, buildInfo(s.Engine()),
		collectors.NewGoCollector(), collectors.NewProcessCollector(collectors.ProcessCollectorOpts{}))
	return m
}

func buildInfo(e service.Engine) prometheus.Collector {
	revision := "unknown"
	if info, ok := debug.ReadBuildInfo(); ok {
		for _, s := range info.Settings {
			if s.Key == "vcs.revision" {
				revision = s.Value
			}
		}
	}
	g := prometheus.NewGauge(prometheus.GaugeOpts{
		Name: "railproof_build_info", Help: "Always 1; the labels tell what runs.",
		ConstLabels: prometheus.Labels{"version": e.Version, "contract_version": e.ContractVersion, "platform": e.Platform, "go_version": runtime.Version(), "revision": revision},
	})
	g.Set(1)
	return g
}

// measure times every request by route and status. Addresses and parameters are no
// labels: there is no end of them.
func (m *metrics) measure(next echo.HandlerFunc) echo.HandlerFunc {
	return func(c echo.Context) error {
		m.inFlight.Inc()
		defer m.inFlight.Dec()
		start := time.Now()
		err := next(c)
		m.duration.WithLabelValues(knownMethod(c.Request().Method), c.Path(), strconv.Itoa(c.Response().Status)).Observe(time.Since(start).Seconds())
		return err
	}
}

// knownMethod keeps made-up methods from becoming labels.
func knownMethod(method string) string {
	switch method {
	case http.MethodGet, http.MethodHead, http.MethodPost, http.MethodDelete, http.MethodOptions:
		return method
	}
	return "other"
}

func (m *metrics) handler() echo.HandlerFunc {
	h := promhttp.HandlerFor(m.registry, promhttp.HandlerOpts{DisableCompression: true})
	return func(c echo.Context) error {
		h.ServeHTTP(c.Response(), c.Request())
		return nil
	}
}

// observed reads, when it is asked, what others count.
type observed struct {
	service *service.Service
	board   *jobs.Board // nil: no jobs
	kept    *results.Cache
	streams func() float64
}

func described(name, help string, labels ...string) *prometheus.Desc {
	return prometheus.NewDesc("railproof_"+name, help, labels, nil)
}

var (
	evaluations  = described("evaluations_total", "Evaluations of a stage at a point.")
	unsolved     = described("evaluations_unsolved_total", "Evaluations that did not converge or ran away thermally.", "status")
	laneSlots    = described("lane_slots", "Slots of a lane of computations.", "lane")
	laneBusy     = described("lane_busy", "Slots that are taken.", "lane")
	laneWaiting  = described("lane_waiting", "Requests that wait for a slot.", "lane")
	laneRefused  = described("lane_refused_total", "Requests turned away because the lane was full.", "lane")
	keptAnswers  = described("results_kept", "Answers kept in memory.")
	keptBytes    = described("results_kept_bytes", "Bytes of the answers kept in memory.")
	openStreams  = described("event_streams", "Open streams of events.")
	jobsByState  = described("jobs", "Jobs in the database, by state.", "state")
	jobsAccepted = described("jobs_accepted_total", "Jobs accepted by this process.")
	jobsEnded    = described("jobs_ended_total", "Jobs that ended in this process, by state.", "state")
	jobsTaken    = described("jobs_taken_over_total", "Jobs that this process took over from one that died.")
	jobsStore    = described("jobs_store_up", "1 while the database of jobs can be used, else 0.")
)

// Describe implements prometheus.Collector.
func (o *observed) Describe(to chan<- *prometheus.Desc) {
	for _, d := range []*prometheus.Desc{
		evaluations, unsolved, laneSlots, laneBusy, laneWaiting, laneRefused, keptAnswers, keptBytes, openStreams,
		jobsByState, jobsAccepted, jobsEnded, jobsTaken, jobsStore,
	} {
		to <- d
	}
}

// Collect implements prometheus.Collector.
func (o *observed) Collect(to chan<- prometheus.Metric) {
	counter := func(d *prometheus.Desc, v int64, labels ...string) {
		to <- prometheus.MustNewConstMetric(d, prometheus.CounterValue, float64(v), labels...)
	}
	gauge := func(d *prometheus.Desc, v float64, labels ...string) {
		to <- prometheus.MustNewConstMetric(d, prometheus.GaugeValue, v, labels...)
	}
	done := o.service.WorkDone()
	counter(evaluations, done.Evaluations.Load())
	counter(unsolved, done.NotConverged.Load(), "not-converged")
	counter(unsolved, done.Runaway.Load(), "runaway")
	for _, l := range o.service.Lanes() {
		gauge(laneSlots, float64(l.Slots), l.Name)
		gauge(laneBusy, float64(l.Busy), l.Name)
		gauge(laneWaiting, float64(l.Waiting), l.Name)
		counter(laneRefused, l.Refused, l.Name)
	}
	answers, bytes := o.kept.Held()
	gauge(keptAnswers, float64(answers))
	gauge(keptBytes, float64(bytes))
	gauge(openStreams, o.streams())
	if o.board != nil {
		o.collectJobs(counter, gauge)
	}
}

// countPatience bounds how long a scrape waits for the database.
const countPatience = 2 * time.Second

func (o *observed) collectJobs(counter func(*prometheus.Desc, int64, ...string), gauge func(*prometheus.Desc, float64, ...string)) {
	ctx, cancel := context.WithTimeout(context.Background(), countPatience)
	defer cancel()
	if states, err := o.board.ByState(ctx); err == nil {
		for state, n := range states {
			gauge(jobsByState, float64(n), string(state))
		}
	}
	up := 1.0
	if o.board.Trouble() != "" {
		up = 0
	}
	gauge(jobsStore, up)
	c := o.board.Counts()
	counter(jobsAccepted, c.Accepted.Load())
	counter(jobsEnded, c.Done.Load(), string(jobs.Done))
	counter(jobsEnded, c.Failed.Load(), string(jobs.Failed))
	counter(jobsEnded, c.Cancelled.Load(), string(jobs.Cancelled))
	counter(jobsTaken, c.TakenOver.Load())
}
