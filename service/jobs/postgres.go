package jobs

import (
	"context"
	"fmt"
	"time"

	"github.com/jackc/pgx/v5/pgxpool"
	"github.com/jackc/pgx/v5/stdlib"
	"github.com/riverqueue/river/riverdriver/riverpgxv5"
)

// migrationLock is the key of the advisory lock under which one process at a time
// migrates.
const migrationLock = 0x7261696c70726f66

// lookEvery bounds how long a process does not see that another one cancelled a job
// that it runs.
const lookEvery = 100 * time.Millisecond

// openPostgres connects to PostgreSQL. Any number of processes may share it.
func openPostgres(ctx context.Context, dsn string, deal func(context.Context, message), o *Options) (*database, error) {
	config, err := pgxpool.ParseConfig(dsn)
	if err != nil {
		return nil, fmt.Errorf("jobs: the PostgreSQL DSN cannot be read") // pgx's text may repeat the password
	}
	config.ConnConfig.ConnectTimeout = 5 * time.Second
	pool, err := pgxpool.NewWithConfig(ctx, config)
	if err != nil {
		return nil, fmt.Errorf("jobs: PostgreSQL: %w", err)
	}
	db := stdlib.OpenDBFromPool(pool)
	d := &database{
		pool: db, blob: "BYTEA",
		shared: true, watch: lookEvery, text: asIs,
		close: func() error {
			err := db.Close()
			pool.Close()
			return err
		},
	}
	clock := `CAST(EXTRACT(EPOCH FROM clock_timestamp()) * 1000 AS BIGINT)`
	d.clock.Store(&clock)
	driver := riverpgxv5.New(pool)
	err = locked(ctx, pool, func() error {
		if err := d.migrate(ctx); err != nil {
			return err
		}
		return migrateQueue(ctx, driver, o)
	})
	if err == nil {
		d.queue, err = newRiver(driver, deal, o)
	}
	if err != nil {
		_ = d.close()
		return nil, err
	}
	return d, nil
}

// locked runs work while this process alone holds the migration lock.
func locked(ctx context.Context, pool *pgxpool.Pool, work func() error) error {
	return pool.AcquireFunc(ctx, func(c *pgxpool.Conn) error {
		if _, err := c.Exec(ctx, `SELECT pg_advisory_lock($1)`, int64(migrationLock)); err != nil {
			return fmt.Errorf("jobs: migration lock: %w", err)
		}
		failed := work()
		if _, err := c.Exec(context.WithoutCancel(ctx), `SELECT pg_advisory_unlock($1)`, int64(migrationLock)); err != nil && failed == nil {
			return fmt.Errorf("jobs: migration lock: %w", err)
		}
		return failed
	})
}
