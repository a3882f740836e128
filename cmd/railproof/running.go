package main

import (
	"context"
	"fmt"
	"log/slog"
	"net"
	"net/http"
	"net/http/pprof"
	"time"

	"railproof/api"
	"railproof/service/jobs"
)

const (
	readHeaderTimeout = 5 * time.Second
	readTimeout       = 15 * time.Second
	idleTimeout       = 60 * time.Second
	writeMargin       = 30 * time.Second // beyond the deadline, so that a late answer is a problem body and no closed socket
	maxHeaderBytes    = 32 << 10
	drainDelay        = 200 * time.Millisecond // between saying not ready and closing the door
)

func newServer(c *serveConfig, handler http.Handler, door *door, log *slog.Logger) *http.Server {
	return &http.Server{
		Handler: handler, TLSConfig: door.tls, ReadHeaderTimeout: readHeaderTimeout, ReadTimeout: readTimeout, IdleTimeout: idleTimeout,
		WriteTimeout: c.deadline + writeMargin, MaxHeaderBytes: maxHeaderBytes, ErrorLog: slog.NewLogLogger(log.Handler(), slog.LevelWarn),
	}
}

// running is a server that serves.
type running struct {
	c       *serveConfig
	log     *slog.Logger
	handler *api.API
	board   *jobs.Board
	server  *http.Server
	traces  *tracing
}

// listeners are what the server takes connections from.
type listeners struct {
	requests net.Listener
	profiles net.Listener // nil: none were asked for
}

func (c *serveConfig) listen(ctx context.Context) (l listeners, err error) {
	var config net.ListenConfig
	if l.requests, err = config.Listen(ctx, "tcp", c.address); err != nil || c.admin == "" {
		return l, err
	}
	if l.profiles, err = config.Listen(ctx, "tcp", c.admin); err != nil {
		l.close()
	}
	return l, err
}

func (l listeners) close() {
	_ = l.requests.Close() // nothing is lost, or closed already
	if l.profiles != nil {
		_ = l.profiles.Close()
	}
}

// start serves requests, and profiles where they were asked for. The channel tells when
// serving has failed.
func (r *running) start(ctx context.Context, l listeners, door *door) <-chan error {
	failed := make(chan error, 2)
	go func() {
		if door.tls != nil {
			failed <- r.server.ServeTLS(l.requests, "", "")
			return
		}
		failed <- r.server.Serve(l.requests)
	}()
	if l.profiles != nil {
		go func() {
			if err := profiles(ctx, l.profiles); ctx.Err() == nil {
				failed <- err
			}
		}()
	}
	return failed
}

// end says not ready first, so that a balancer sends no more, then lets open
// requests and running jobs finish. Jobs that do not are kept.
func (r *running) end() int {
	r.handler.Drain()
	r.log.Info("draining")
	time.Sleep(drainDelay)
	ctx, cancel := context.WithTimeout(context.Background(), r.c.grace)
	defer cancel()
	code := exitFine
	if err := r.server.Shutdown(ctx); err != nil {
		r.log.Error("requests were cut off", "cause", err)
		code = exitOurFault
	}
	if err := r.board.Close(ctx); err != nil {
		r.log.Error("jobs did not end in order; they are taken up at the next start", "cause", err)
		code = exitOurFault
	}
	if err := r.traces.end(ctx); err != nil {
		r.log.Warn("traces were not sent", "cause", err)
	}
	r.log.Info("ended")
	return code
}

// checkAdmin keeps profiles, which tell much and cost much, on this machine.
func (c *serveConfig) checkAdmin() error {
	if c.admin == "" {
		return nil
	}
	local, err := onThisMachine(c.admin)
	if err != nil {
		return fmt.Errorf("--admin-address: %w", err)
	}
	if !local {
		return fmt.Errorf("--admin-address %s can be reached from other machines", c.admin)
	}
	return nil
}

// profiles serves the profiles of the running program.
func profiles(ctx context.Context, listener net.Listener) error {
	mux := http.NewServeMux()
	mux.HandleFunc("/debug/pprof/", pprof.Index)
	mux.HandleFunc("/debug/pprof/cmdline", pprof.Cmdline)
	mux.HandleFunc("/debug/pprof/profile", pprof.Profile)
	mux.HandleFunc("/debug/pprof/symbol", pprof.Symbol)
	mux.HandleFunc("/debug/pprof/trace", pprof.Trace)
	server := &http.Server{Handler: mux, ReadHeaderTimeout: readHeaderTimeout}
	context.AfterFunc(ctx, func() { _ = server.Close() }) // it answers nothing that must end in order
	return server.Serve(listener)
}
