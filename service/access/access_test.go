package access

import (
	"fmt"
	"log/slog"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"github.com/stretchr/testify/require"
)

func keyFile(t *testing.T, lines ...string) (string, *Keys) {
	t.Helper()
	path := filepath.Join(t.TempDir(), "keys")
	require.NoError(t, os.WriteFile(path, []byte(strings.Join(lines, "\n")), 0o600))
	k, err := OpenKeys(path, slog.New(slog.DiscardHandler))
	require.NoError(t, err)
	return path, k
}

func newKey(t *testing.T, name string, s Scope) (key, line string) {
	t.Helper()
	key, line, err := NewKey(Caller{name, s})
	require.NoError(t, err)
	return key, line
}

func TestKeys(t *testing.T) {
	plm, plmLine := newKey(t, "plm", Compute)
	ops, opsLine := newKey(t, "ops", Admin)
	require.NotContains(t, plmLine, plm, "the file does not hold the key")
	_, k := keyFile(t, "# keys of the night run", plmLine, "", opsLine)
	got, known := k.Caller(plm)
	require.True(t, known)
	require.Equal(t, Caller{"plm", Compute}, got)
	got, known = k.Caller(ops)
	require.True(t, known)
	require.Equal(t, Caller{"ops", Admin}, got)
	for _, wrong := range []string{"", plm[:len(plm)-1], plm + "0", strings.ToUpper(plm), strings.Fields(plmLine)[2]} {
		got, known = k.Caller(wrong)
		require.False(t, known, wrong)
		require.Zero(t, got)
	}
}

func TestKeysAreRotatedWithoutRestart(t *testing.T) {
	was, wasLine := newKey(t, "plm", Compute)
	is, isLine := newKey(t, "plm", Compute)
	path, k := keyFile(t, wasLine)
	require.NoError(t, os.WriteFile(path, []byte(isLine), 0o600))
	require.NoError(t, os.Chtimes(path, time.Now(), time.Now().Add(time.Hour)))
	_, known := k.Caller(is)
	require.True(t, known, "seen at the next look")
	_, known = k.Caller(was)
	require.False(t, known)
	require.NoError(t, os.WriteFile(path, []byte("nonsense"), 0o600))
	require.Error(t, k.Reload())
	_, known = k.Caller(is)
	require.True(t, known, "an unreadable file changes nothing")
	require.NoError(t, os.WriteFile(path, []byte(wasLine), 0o600))
	require.NoError(t, k.Reload())
	_, known = k.Caller(was)
	require.True(t, known)
}

func TestKeyFilesThatAreWrong(t *testing.T) {
	digest := strings.Repeat("0", 64)
	for _, line := range []string{"plm compute", "plm compute " + digest + " x", "plm everything " + digest, "plm read 00", "plm read " + strings.Repeat("g", 64), "p/m read " + digest, "plm none " + digest} {
		_, err := parse(strings.NewReader("# first\n" + line))
		require.ErrorContains(t, err, "line 2", line)
	}
	_, _, err := NewKey(Caller{"a b", Read})
	require.Error(t, err)
	_, _, err = NewKey(Caller{"a", None})
	require.Error(t, err)
}

func TestLimiter(t *testing.T) {
	l := NewLimiter(2, 5)
	now := time.Unix(1000, 0)
	for i := range 5 {
		q := l.Take("a", now)
		require.True(t, q.Allowed)
		require.Equal(t, 4-i, q.Remaining)
	}
	q := l.Take("a", now)
	require.False(t, q.Allowed)
	require.Equal(t, 500*time.Millisecond, q.Retry)
	require.Equal(t, 2500*time.Millisecond, q.Restored)
	require.True(t, l.Take("b", now).Allowed, "each caller has a quota of its own")
	require.True(t, l.Take("a", now.Add(q.Retry)).Allowed, "when it was said")
	require.False(t, l.Take("a", now.Add(q.Retry)).Allowed)
	require.Equal(t, 4, l.Take("a", now.Add(time.Hour)).Remaining, "never more than the burst")
}

func TestLimiterForgetsWhomItHasNotSeenLongest(t *testing.T) {
	l := NewLimiter(1, 1)
	for i := range mostCallers + 10 {
		l.Take(fmt.Sprint(i), time.Unix(0, 0))
	}
	require.Len(t, l.callers, mostCallers)
	require.Equal(t, mostCallers, l.recent.Len())
	require.NotContains(t, l.callers, "9")
	require.Contains(t, l.callers, "10")
}
