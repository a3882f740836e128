package jobs

import (
	"context"
	"database/sql"
	"fmt"
)

// migrations are the steps of the schema, forward only. One that was released is
// never changed.
var migrations = []string{
	`CREATE TABLE railproof_jobs (
		id TEXT PRIMARY KEY,
		engine TEXT NOT NULL,
		operation TEXT NOT NULL,
		request_key TEXT NOT NULL,
		result_id TEXT NOT NULL,
		request BYTES NOT NULL,
		state TEXT NOT NULL,
		sequence BIGINT NOT NULL,
		claims BIGINT NOT NULL,
		deaths BIGINT NOT NULL,
		owner TEXT NOT NULL,
		beat BIGINT NOT NULL,
		queued BIGINT NOT NULL,
		done BIGINT NOT NULL,
		expected BIGINT NOT NULL,
		problem BYTES,
		created BIGINT NOT NULL,
		started BIGINT NOT NULL,
		ended BIGINT NOT NULL
	);
	CREATE UNIQUE INDEX railproof_jobs_request ON railproof_jobs (request_key) WHERE state IN ('waiting', 'running', 'done');
	CREATE INDEX railproof_jobs_state ON railproof_jobs (state);
	CREATE TABLE railproof_results (
		id TEXT PRIMARY KEY,
		media TEXT NOT NULL,
		body BYTES NOT NULL,
		size BIGINT NOT NULL,
		created BIGINT NOT NULL
	);
	CREATE INDEX railproof_results_age ON railproof_results (created);
	CREATE TABLE railproof_parts (
		job TEXT NOT NULL,
		part BIGINT NOT NULL,
		owner TEXT NOT NULL,
		beat BIGINT NOT NULL,
		done BIGINT NOT NULL,
		body BYTES,
		PRIMARY KEY (job, part)
	);
	CREATE TABLE railproof_processes (
		id TEXT PRIMARY KEY,
		engine TEXT NOT NULL,
		beat BIGINT NOT NULL
	)`,
	`ALTER TABLE railproof_results ADD COLUMN operation TEXT NOT NULL DEFAULT ''`,
}

// migrate brings the schema up to date. The caller holds the lock that keeps other
// processes out.
func (d *database) migrate(ctx context.Context) error {
	if _, err := d.exec(ctx, `CREATE TABLE IF NOT EXISTS railproof_schema (version BIGINT NOT NULL)`); err != nil {
		return err
	}
	var version int
	if err := d.row(ctx, `SELECT COALESCE(MAX(version), 0) FROM railproof_schema`).Scan(&version); err != nil {
		return err
	}
	if version > len(migrations) {
		return fmt.Errorf("jobs: the database has schema %d, this program knows %d: it was used by a newer one", version, len(migrations))
	}
	for i := version; i < len(migrations); i++ {
		if err := d.step(ctx, i+1, migrations[i]); err != nil {
			return fmt.Errorf("jobs: schema %d: %w", i+1, err)
		}
	}
	return nil
}

func (d *database) step(ctx context.Context, version int, statements string) error {
	return d.transaction(ctx, func(tx *sql.Tx) error {
		if _, err := tx.ExecContext(ctx, d.say(statements)); err != nil {
			return err
		}
		_, err := tx.ExecContext(ctx, d.say(`INSERT INTO railproof_schema (version) VALUES ($1)`), version)
		return err
	})
}

func (d *database) transaction(ctx context.Context, work func(tx *sql.Tx) error) error {
	tx, err := d.pool.BeginTx(ctx, nil)
	if err != nil {
		return err
	}
	if err := work(tx); err != nil {
		_ = tx.Rollback() // the first error says what happened
		return err
	}
	return tx.Commit()
}
