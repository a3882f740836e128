package main

import (
	"context"
	"flag"
	"fmt"
	"log/slog"
	"os"
	"os/signal"
	"runtime"
	"syscall"
	"time"

	"railproof/api"
	"railproof/openapi"
	"railproof/service"
)

var serveCommand = &command{
	name: "serve", summary: "serve the API over HTTP",
	about: `Serves the API until it is interrupted, then answers what it has accepted and ends; jobs that are not
done are kept for the next start. Every flag can be set in the environment, or in a file of lines
NAME=VALUE, as RAILPROOF_ and its name in capitals, with _ for -. A flag wins over the environment,
the environment over the file.`,
	example: "railproof serve --address 127.0.0.1:8080",
	prepare: func(flags *flag.FlagSet) action {
		var c serveConfig
		c.declare(flags)
		return func(ctx context.Context, t terminal, operands []string) int {
			if len(operands) > 0 {
				fmt.Fprintln(t.err, "railproof serve: takes no operands")
				return exitBadInput
			}
			if err := configure(flags, &c.file, t.env); err != nil {
				fmt.Fprintf(t.err, "railproof serve: %v\n", err)
				return exitBadInput
			}
			return c.serve(ctx, t)
		}
	},
}

type serveConfig struct {
	address  string
	admin    string
	file     string
	check    bool
	logLevel string
	maxBody  int64
	deadline time.Duration
	workers  int
	queue    int
	grace    time.Duration
	results  int64
	storage  storageConfig
	access   accessConfig
}

func (c *serveConfig) declare(f *flag.FlagSet) {
	f.StringVar(&c.address, "address", "127.0.0.1:8080", "`HOST:PORT` to listen on; port 0 takes a free one")
	f.StringVar(&c.admin, "admin-address", "", "`HOST:PORT` on this machine for profiles of the running program; none without it")
	f.StringVar(&c.file, "config", "", "`FILE` of lines NAME=VALUE")
	f.BoolVar(&c.check, "check", false, "check the configuration and its files, and end")
	f.StringVar(&c.logLevel, "log-level", "info", "least `LEVEL` that is logged: debug, info, warn or error")
	f.Int64Var(&c.maxBody, "max-body-bytes", 1<<20, "largest request body, `BYTES`")
	f.DurationVar(&c.deadline, "deadline", 20*time.Second, "`TIME` for one request")
	f.IntVar(&c.workers, "workers", 0, "`SLOTS` of each lane; 0 means one per core")
	f.IntVar(&c.queue, "queue", 64, "`CALLERS` that may wait for a slot of a lane")
	f.DurationVar(&c.grace, "grace", 10*time.Second, "`TIME` for open requests and running jobs when the server ends")
	f.Int64Var(&c.results, "results-bytes", 32<<20, "`BYTES` of answers kept in memory")
	c.storage.declare(f)
	c.access.declare(f)
}

func (c *serveConfig) serve(ctx context.Context, t terminal) int {
	var level slog.Level
	if err := level.UnmarshalText([]byte(c.logLevel)); err != nil {
		fmt.Fprintf(t.err, "railproof serve: log level %q: use debug, info, warn or error\n", c.logLevel)
		return exitBadInput
	}
	log := slog.New(slog.NewJSONHandler(t.err, &slog.HandlerOptions{Level: level}))
	door, err := c.access.check(c.address, log)
	if err == nil {
		err = c.storage.check(t.env)
	}
	if err == nil {
		err = c.checkAdmin()
	}
	if err != nil {
		fmt.Fprintf(t.err, "railproof serve: %v\n", err)
		return exitBadInput
	}
	if c.check {
		fmt.Fprintf(t.out, "configuration is sound\n  address  %s\n  jobs in  %s\n", c.address, &c.storage)
		return exitFine
	}
	if door.loud != "" {
		log.Error(door.loud)
	}
	l, err := c.listen(ctx)
	if err != nil {
		fmt.Fprintf(t.err, "railproof serve: %v\n", err)
		return exitBadInput
	}
	return c.run(ctx, t, log, door, l)
}

// run builds the server and serves until the context ends.
func (c *serveConfig) run(ctx context.Context, t terminal, log *slog.Logger, door *door, l listeners) int {
	defer l.close()
	s := service.New(service.Options{ContractVersion: openapi.Load().Version(), Workers: c.workers, Jobs: c.storage.workers, QueueLength: c.queue})
	oneThreadMore(t.env)
	traces, err := newTracing(ctx, t.env)
	if err != nil {
		fmt.Fprintf(t.err, "railproof serve: %v\n", err)
		return exitBadInput
	}
	board, err := c.storage.open(ctx, s, traces, log)
	if err != nil {
		fmt.Fprintf(t.err, "railproof serve: %v\n", err)
		return exitBadInput
	}
	handler := api.New(api.Options{
		Service: s, Log: log, MaxBody: c.maxBody, Deadline: c.deadline, Jobs: board, Results: c.results, Access: door.access,
	})
	r := &running{c, log, handler, board, newServer(c, traces.requests(handler), door, log), traces}
	go tidy(ctx)
	rotating(ctx, door, log)
	failed := r.start(ctx, l, door)
	greet(t, l, door, &c.storage)
	select {
	case err := <-failed:
		fmt.Fprintf(t.err, "railproof serve: %v\n", err)
		r.end()
		return exitOurFault
	case <-ctx.Done():
	}
	return r.end()
}

// oneThreadMore lets the runtime use one thread more than there are cores. The workers
// of long runs, as many as cores, then never hold all of them: one is left to see that
// a request has arrived and to answer it, and the system shares the cores among them.
func oneThreadMore(env func(string) string) {
	if env("GOMAXPROCS") == "" {
		runtime.GOMAXPROCS(runtime.GOMAXPROCS(0) + 1)
	}
}

// rotating reads keys and certificate again on SIGHUP.
func rotating(ctx context.Context, door *door, log *slog.Logger) {
	hangUp := make(chan os.Signal, 1)
	signal.Notify(hangUp, syscall.SIGHUP)
	go func() {
		defer signal.Stop(hangUp)
		for {
			select {
			case <-ctx.Done():
				return
			case <-hangUp:
				door.reload(log)
			}
		}
	}()
}

// greet prints where the server is and one request that can be pasted.
func greet(t terminal, l listeners, door *door, storage *storageConfig) {
	scheme := "http"
	if door.tls != nil {
		scheme = "https"
	}
	base := scheme + "://" + l.requests.Addr().String()
	profiles := ""
	if l.profiles != nil {
		profiles = fmt.Sprintf("  profiles   http://%s/debug/pprof/\n", l.profiles.Addr())
	}
	fmt.Fprintf(t.out, "railproof %s\n  serves     %s\n  documents  %s/docs\n  jobs in    %s\n%s  try        curl -s %s/v1/losses -H 'Content-Type: application/json' --data-binary @openapi/examples/buoy-5v0/losses.json\n", service.Version, base, base, storage, profiles, base)
}
