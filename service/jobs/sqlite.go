package jobs

import (
	"context"
	"database/sql"
	"fmt"
	"net/url"
	"os"
	"path/filepath"

	"github.com/riverqueue/river/riverdriver/riversqlite"
	_ "modernc.org/sqlite" // the driver "sqlite"
)

// fileName is the database's name in its directory.
const fileName = "jobs.sqlite"

// openSQLite opens the file in the directory, or a database in memory without one.
// The file is locked for this process as long as it is open.
func openSQLite(ctx context.Context, directory string, deal func(context.Context, message), o *Options) (*database, error) {
	name := ":memory:"
	if directory != "" {
		if err := os.MkdirAll(directory, 0o700); err != nil {
			return nil, fmt.Errorf("jobs: data directory: %w", err)
		}
		name = filepath.Join(directory, fileName)
	}
	pragmas := url.Values{
		"_pragma": {"busy_timeout(2000)", "locking_mode(EXCLUSIVE)", "journal_mode(WAL)", "synchronous(FULL)"},
		"_txlock": {"immediate"},
	}
	pool, err := sql.Open("sqlite", "file:"+name+"?"+pragmas.Encode())
	if err != nil {
		return nil, fmt.Errorf("jobs: %w", err)
	}
	pool.SetMaxOpenConns(1) // the queue's driver wants it; a closed one would lose what is in memory
	pool.SetMaxIdleConns(1)
	d := &database{
		pool: pool, blob: "BLOB",
		watch: beatEvery, text: questionMarks, close: pool.Close,
	}
	clock := `CAST(unixepoch('subsec') * 1000 AS INTEGER)`
	d.clock.Store(&clock)
	driver := riversqlite.New(pool)
	if err := d.migrate(ctx); err != nil {
		_ = pool.Close()
		return nil, fmt.Errorf("jobs: %s (is another process using it?): %w", name, err)
	}
	if err := migrateQueue(ctx, driver, o); err != nil {
		_ = pool.Close()
		return nil, err
	}
	if d.queue, err = newRiver(driver, deal, o); err != nil {
		_ = pool.Close()
		return nil, err
	}
	return d, nil
}
