package jobs

import (
	"testing"
	"time"

	"github.com/stretchr/testify/require"
)

func TestSQLite(t *testing.T) {
	everywhere(t, func(t *testing.T) place { return place{directory: t.TempDir()} })
}

func TestInMemory(t *testing.T) {
	f := new(fakeExecutor)
	b := place{}.open(t, f, nil)
	await(t, b, submit(t, b, work{Steps: 3, Step: time.Millisecond, Name: "a"}).ID, Done)
}

func TestAFileIsForOneProcess(t *testing.T) {
	p := place{directory: t.TempDir()}
	p.open(t, new(fakeExecutor), nil)
	_, err := Open(t.Context(), Options{Executor: new(fakeExecutor), Engine: "test", Directory: p.directory})
	require.ErrorContains(t, err, "another process")
}

func TestANewerSchemaIsRefused(t *testing.T) {
	p := place{directory: t.TempDir()}
	b := p.open(t, new(fakeExecutor), nil)
	_, err := b.db.exec(t.Context(), `INSERT INTO railproof_schema (version) VALUES (1000)`)
	require.NoError(t, err)
	shut(b)
	_, err = Open(t.Context(), Options{Executor: new(fakeExecutor), Engine: "test", Directory: p.directory})
	require.ErrorContains(t, err, "newer")
}
