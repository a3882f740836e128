package main

import (
	"context"
	"flag"
	"fmt"
	"log/slog"
	"path/filepath"
	"time"

	"railproof/api/exchange"
	"railproof/openapi"
	"railproof/service"
	"railproof/service/jobs"
)

// storageConfig says where jobs are kept, and for how long.
type storageConfig struct {
	directory string
	dsn       string
	ephemeral bool
	workers   int
	waiting   int
	deadline  time.Duration
	keepFor   time.Duration
	keepBytes int64
}

func (c *storageConfig) declare(f *flag.FlagSet) {
	f.StringVar(&c.directory, "data-directory", "", "`DIRECTORY` of the jobs' SQLite file, for one process; without it, railproof in the user's state folder")
	f.StringVar(&c.dsn, "postgres", "", "`DSN` of a PostgreSQL database for the jobs, which several processes may share; better given in the environment")
	f.BoolVar(&c.ephemeral, "ephemeral", false, "keep jobs in memory only")
	f.IntVar(&c.workers, "job-workers", 2, "`JOBS` that run at once in this process")
	f.IntVar(&c.waiting, "job-queue", 10_000, "`JOBS` that may wait")
	f.DurationVar(&c.deadline, "job-deadline", 15*time.Minute, "`TIME` for one job")
	f.DurationVar(&c.keepFor, "keep", 7*24*time.Hour, "`TIME` for which jobs and their results are kept after their end")
	f.Int64Var(&c.keepBytes, "keep-bytes", 1<<30, "`BYTES` of results that are kept in the database, the newest")
}

// check finds the directory and refuses what contradicts itself.
func (c *storageConfig) check(env func(string) string) error {
	switch {
	case c.ephemeral && (c.dsn != "" || c.directory != ""), c.dsn != "" && c.directory != "":
		return fmt.Errorf("--ephemeral, --postgres and --data-directory exclude each other")
	case c.ephemeral, c.dsn != "", c.directory != "":
		return nil
	}
	var err error
	c.directory, err = stateDirectory(env)
	return err
}

// stateDirectory is where a service manager or the XDG base directories put state.
func stateDirectory(env func(string) string) (string, error) {
	if d := env("STATE_DIRECTORY"); d != "" {
		return d, nil
	}
	if d := env("XDG_STATE_HOME"); filepath.IsAbs(d) {
		return filepath.Join(d, "railproof"), nil
	}
	if d := env("HOME"); d != "" {
		return filepath.Join(d, ".local", "state", "railproof"), nil
	}
	return "", fmt.Errorf("there is no home directory for the jobs: give --data-directory or --ephemeral")
}

// String names the place without secrets.
func (c *storageConfig) String() string {
	switch {
	case c.ephemeral:
		return "memory"
	case c.dsn != "":
		return "PostgreSQL"
	}
	return c.directory
}

func (c *storageConfig) open(ctx context.Context, s *service.Service, traces *tracing, log *slog.Logger) (*jobs.Board, error) {
	e := s.Engine()
	return jobs.Open(ctx, jobs.Options{
		Executor: traces.jobs(exchange.New(openapi.Load(), s).Executor()),
		Engine:   e.Name + " " + e.Version + " " + e.ContractVersion + " " + e.Platform,
		DSN:      c.dsn, Directory: c.directory, Workers: c.workers, Waiting: c.waiting,
		Deadline: c.deadline, KeepFor: c.keepFor, KeepBytes: c.keepBytes, Log: log,
	})
}
