package main

import (
	"context"
	"flag"
	"fmt"
	"log/slog"
	"net"
	"net/http"
	"time"

	"railproof/api"
	"railproof/openapi"
	"railproof/service"
)

var serveCommand = &command{
	name: "serve", summary: "serve the API over HTTP",
	about: `Serves the API until it is interrupted, then answers what it has accepted and ends.
Every flag can be set in the environment as RAILPROOF_ and its name in capitals, with _ for -;
a flag wins over the environment.`,
	example: "railproof serve --address 127.0.0.1:8080",
	prepare: func(flags *flag.FlagSet) action {
		var c serveConfig
		c.declare(flags)
		return func(ctx context.Context, t terminal, operands []string) int {
			if len(operands) > 0 {
				fmt.Fprintln(t.err, "railproof serve: takes no operands")
				return exitBadInput
			}
			if err := fromEnvironment(flags, t.env); err != nil {
				fmt.Fprintf(t.err, "railproof serve: %v\n", err)
				return exitBadInput
			}
			return c.serve(ctx, t)
		}
	},
}

type serveConfig struct {
	address  string
	logLevel string
	maxBody  int64
	deadline time.Duration
	workers  int
	queue    int
	grace    time.Duration
}

func (c *serveConfig) declare(f *flag.FlagSet) {
	f.StringVar(&c.address, "address", "127.0.0.1:8080", "`HOST:PORT` to listen on; port 0 takes a free one")
	f.StringVar(&c.logLevel, "log-level", "info", "least `LEVEL` that is logged: debug, info, warn or error")
	f.Int64Var(&c.maxBody, "max-body-bytes", 1<<20, "largest request body, `BYTES`")
	f.DurationVar(&c.deadline, "deadline", 20*time.Second, "`TIME` for one request")
	f.IntVar(&c.workers, "workers", 0, "`SLOTS` of each lane; 0 means one per core")
	f.IntVar(&c.queue, "queue", 64, "`CALLERS` that may wait for a slot of a lane")
	f.DurationVar(&c.grace, "grace", 10*time.Second, "`TIME` for open requests when the server ends")
}

const (
	readHeaderTimeout = 5 * time.Second
	readTimeout       = 15 * time.Second
	idleTimeout       = 60 * time.Second
	writeMargin       = 30 * time.Second // beyond the deadline, so that a late answer is a problem body and no closed socket
	maxHeaderBytes    = 32 << 10
	drainDelay        = 200 * time.Millisecond // between saying not ready and closing the door
)

func (c *serveConfig) serve(ctx context.Context, t terminal) int {
	var level slog.Level
	if err := level.UnmarshalText([]byte(c.logLevel)); err != nil {
		fmt.Fprintf(t.err, "railproof serve: log level %q: use debug, info, warn or error\n", c.logLevel)
		return exitBadInput
	}
	log := slog.New(slog.NewJSONHandler(t.err, &slog.HandlerOptions{Level: level}))
	handler := api.New(api.Options{
		Service: service.New(service.Options{ContractVersion: openapi.Load().Version(), Workers: c.workers, QueueLength: c.queue}),
		Log:     log, MaxBody: c.maxBody, Deadline: c.deadline,
	})
	listener, err := (&net.ListenConfig{}).Listen(ctx, "tcp", c.address)
	if err != nil {
		fmt.Fprintf(t.err, "railproof serve: %v\n", err)
		return exitBadInput
	}
	server := &http.Server{
		Handler: handler, ReadHeaderTimeout: readHeaderTimeout, ReadTimeout: readTimeout, IdleTimeout: idleTimeout,
		WriteTimeout: c.deadline + writeMargin, MaxHeaderBytes: maxHeaderBytes, ErrorLog: slog.NewLogLogger(log.Handler(), slog.LevelWarn),
	}
	greet(t, listener.Addr().String())
	failed := make(chan error, 1)
	go func() { failed <- server.Serve(listener) }()
	select {
	case err := <-failed:
		fmt.Fprintf(t.err, "railproof serve: %v\n", err)
		return exitOurFault
	case <-ctx.Done():
	}
	return c.end(log, handler, server)
}

// end says not ready first, so that a balancer sends no more, then lets open
// requests finish.
func (c *serveConfig) end(log *slog.Logger, handler *api.API, server *http.Server) int {
	handler.Drain()
	log.Info("draining")
	time.Sleep(drainDelay)
	ctx, cancel := context.WithTimeout(context.Background(), c.grace)
	defer cancel()
	if err := server.Shutdown(ctx); err != nil {
		log.Error("requests were cut off", "cause", err)
		return exitOurFault
	}
	log.Info("ended")
	return exitFine
}

// greet prints where the server is and one request that can be pasted.
func greet(t terminal, address string) {
	base := "http://" + address
	fmt.Fprintf(t.out, "railproof %s\n  serves     %s\n  documents  %s/docs\n  try        curl -s %s/v1/losses -H 'Content-Type: application/json' --data-binary @openapi/examples/buoy-5v0/losses.json\n", service.Version, base, base, base)
}
