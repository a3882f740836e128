package jobs

import (
	"context"
	"database/sql"
	"strings"
	"sync/atomic"
	"time"
)

// database is one of the two that jobs can live in. The statements of this package
// are written once, with $1 for parameters.
type database struct {
	pool   *sql.DB
	clock  atomic.Pointer[string] // in milliseconds since 1970, as an expression
	blob   string                 // name of the type of bytes
	shared bool                   // other processes may use it at the same time
	watch  time.Duration          // between looks for what other processes changed
	text   func(string) string
	queue  queue
	close  func() error
}

// queue hands the identifiers of jobs to whichever process has a free worker.
type queue interface {
	add(ctx context.Context, m message) error
	empty(ctx context.Context) (bool, error) // no message waits for a worker
	start(ctx context.Context) error
	stop(ctx context.Context) error
}

// questionMarks writes $1 as ?1.
func questionMarks(statement string) string { return strings.ReplaceAll(statement, "$", "?") }

func asIs(statement string) string { return statement }

// say replaces what the databases write differently.
func (d *database) say(statement string) string {
	return d.text(strings.NewReplacer("NOW()", *d.clock.Load(), "BYTES", d.blob).Replace(statement))
}

func (d *database) exec(ctx context.Context, statement string, args ...any) (int64, error) {
	r, err := d.pool.ExecContext(ctx, d.say(statement), args...)
	if err != nil {
		return 0, err
	}
	return r.RowsAffected()
}

func (d *database) row(ctx context.Context, statement string, args ...any) *sql.Row {
	return d.pool.QueryRowContext(ctx, d.say(statement), args...)
}

func (d *database) rows(ctx context.Context, statement string, args ...any) (*sql.Rows, error) {
	return d.pool.QueryContext(ctx, d.say(statement), args...)
}
