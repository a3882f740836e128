//go:build e2e

package e2e

import (
	"bufio"
	"errors"
	"fmt"
	"io"
	"net"
	"net/http"
	"os"
	"strings"
	"sync"
	"testing"
	"time"

	"github.com/stretchr/testify/require"
)

func dial(t *testing.T, s *served) (net.Conn, error) {
	return (&net.Dialer{Timeout: 20 * time.Second}).DialContext(t.Context(), "tcp", strings.TrimPrefix(s.base, "http://"))
}

// lossesHead is the head of a request of which the body is still to come.
func lossesHead(s *served, bytes int) string {
	return fmt.Sprintf("POST /v1/losses HTTP/1.1\r\nHost: %s\r\nContent-Type: application/json\r\nContent-Length: %d\r\n\r\n", strings.TrimPrefix(s.base, "http://"), bytes)
}

const slowClients = 10_000

func TestManySlowClients(t *testing.T) {
	s := start(t, []string{"--address", "127.0.0.1:0"})
	connections := make([]net.Conn, slowClients)
	var all sync.WaitGroup
	for w := range 16 {
		all.Go(func() {
			for i := w; i < slowClients; i += 16 {
				c, err := dial(t, s)
				if err != nil {
					continue
				}
				_, _ = io.WriteString(c, lossesHead(s, 5000)+"{") // the server may refuse it
				connections[i] = c
			}
		})
	}
	all.Wait()
	open := 0
	for _, c := range connections {
		if c != nil {
			open++
		}
	}
	require.Greater(t, open, slowClients*9/10)
	slowest := time.Duration(0)
	for range 20 {
		before := time.Now()
		status, answer := post(t, s.base+"/v1/losses", example(t, "buoy-5v0/losses.json"))
		require.Equal(t, 200, status, answer)
		slowest = max(slowest, time.Since(before))
	}
	t.Logf("%d slow clients; the slowest of 20 requests beside them took %v; memory %d MiB", open, slowest.Round(time.Millisecond), resident(t, s))
	require.Less(t, slowest, 5*time.Second)
	for _, c := range connections {
		if c != nil {
			_ = c.Close()
		}
	}
}

func TestOneByteASecond(t *testing.T) {
	t.Parallel()
	s := start(t, []string{"--address", "127.0.0.1:0"})
	head, err := dial(t, s)
	require.NoError(t, err)
	defer head.Close()
	body, err := dial(t, s)
	require.NoError(t, err)
	defer body.Close()
	_, err = io.WriteString(body, lossesHead(s, 5000))
	require.NoError(t, err)
	began := time.Now()
	ended := func(c net.Conn, send string) time.Duration {
		for i := range 40 {
			if _, err := io.WriteString(c, send[i%len(send):i%len(send)+1]); err != nil {
				break
			}
			_ = c.SetReadDeadline(time.Now().Add(time.Second))
			if _, err := c.Read(make([]byte, 1)); err != nil && !errors.Is(err, os.ErrDeadlineExceeded) {
				break
			} else if err == nil {
				break
			}
		}
		return time.Since(began)
	}
	var all sync.WaitGroup
	var headTook, bodyTook time.Duration
	all.Go(func() { headTook = ended(head, "GET /healthz HTTP/1.1\r\nX: yyyyyyyyyyyyyyyyyyyyyyyyyyyyyyy") })
	all.Go(func() { bodyTook = ended(body, "{     ") })
	all.Wait()
	t.Logf("a slow head was cut off after %v, a slow body after %v", headTook.Round(time.Second), bodyTook.Round(time.Second))
	require.Less(t, headTook, 12*time.Second)
	require.Less(t, bodyTook, 25*time.Second)
}

func TestHalfClosed(t *testing.T) {
	s := start(t, []string{"--address", "127.0.0.1:0"})
	body := example(t, "buoy-5v0/losses.json")
	whole, err := dial(t, s)
	require.NoError(t, err)
	defer whole.Close()
	_, err = io.WriteString(whole, lossesHead(s, len(body))+body)
	require.NoError(t, err)
	require.NoError(t, whole.(*net.TCPConn).CloseWrite())
	_ = whole.SetReadDeadline(time.Now().Add(10 * time.Second))
	if response, err := http.ReadResponse(bufio.NewReader(whole), nil); err == nil { // a server may take it as gone
		require.Contains(t, []int{200, 503}, response.StatusCode)
		_ = response.Body.Close()
	}
	cut, err := dial(t, s)
	require.NoError(t, err)
	defer cut.Close()
	_, err = io.WriteString(cut, lossesHead(s, len(body))+body[:100])
	require.NoError(t, err)
	require.NoError(t, cut.(*net.TCPConn).CloseWrite())
	_ = cut.SetReadDeadline(time.Now().Add(10 * time.Second))
	response, err := http.ReadResponse(bufio.NewReader(cut), nil)
	require.NoError(t, err)
	require.Equal(t, 400, response.StatusCode)
	_ = response.Body.Close()
	status, _ := get(t, s.base+"/healthz")
	require.Equal(t, 200, status)
}
