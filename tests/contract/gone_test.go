package contract

import (
	"bytes"
	"context"
	"net/http"
	"strings"
	"testing"
	"time"

	"github.com/stretchr/testify/require"
)

// minutes is a request that takes minutes to answer.
func minutes(t testing.TB) []byte {
	t.Helper()
	short := exampleRequest(t, "buoy-5v0/corners.json")
	long := bytes.Replace(short, []byte(`"samples": 10000`), []byte(`"samples": 10000000`), 1)
	require.Greater(t, len(long), len(short))
	return long
}

// What nobody waits for any more is not computed to its end.
func TestAClientThatGoesStopsItsWork(t *testing.T) {
	at := server(t)
	busy := func() bool {
		return strings.Contains(string(send(t, "GET", at+"/metrics", nil).body), `railproof_lane_busy{lane="bulk"} 1`)
	}
	ctx, leave := context.WithCancel(t.Context())
	defer leave()
	request, err := http.NewRequestWithContext(ctx, http.MethodPost, at+"/v1/corners", bytes.NewReader(minutes(t)))
	require.NoError(t, err)
	request.Header.Set("Content-Type", "application/json")
	answered := make(chan error, 1)
	go func() {
		response, err := http.DefaultClient.Do(request)
		if err == nil {
			_ = response.Body.Close()
		}
		answered <- err
	}()
	require.Eventually(t, busy, time.Minute, time.Millisecond)
	leave()
	require.ErrorIs(t, <-answered, context.Canceled)
	require.Eventually(t, func() bool { return !busy() }, 10*time.Second, time.Millisecond)
}
