package api

import (
	"testing"
	"time"

	"github.com/stretchr/testify/require"
)

func TestPreferred(t *testing.T) {
	cases := []struct {
		name    string
		headers []string
		want    preference
	}{
		{"nothing", nil, preference{}},
		{"async", []string{"respond-async"}, preference{async: true}},
		{"case-does-not-matter", []string{"Respond-Async"}, preference{async: true}},
		{"wait", []string{"respond-async, wait=10"}, preference{true, 10 * time.Second, true}},
		{"two-headers", []string{"respond-async", "wait = 3"}, preference{true, 3 * time.Second, true}},
		{"wait-alone", []string{"wait=3"}, preference{false, 3 * time.Second, true}},
		{"parameters", []string{"respond-async; x=1, handling=strict"}, preference{async: true}},
		{"first-counts", []string{"wait=1, wait=2"}, preference{false, time.Second, true}},
		{"nonsense", []string{"wait=soon, respond-async=no, ,;="}, preference{}},
		{"negative", []string{"wait=-1"}, preference{}},
		{"for-ever", []string{"wait=1000000"}, preference{}},
	}
	for _, c := range cases {
		t.Run(c.name, func(t *testing.T) { require.Equal(t, c.want, preferred(c.headers)) })
	}
}

func TestTakesGzip(t *testing.T) {
	for header, want := range map[string]bool{"": false, "gzip": true, "GZIP": true, "br, gzip;q=0.5": true, "gzip;q=0": false, "*": true, "*;q=0": false, "*, gzip;q=0": false, "identity": false} {
		require.Equal(t, want, takesGzip([]string{header}), header)
	}
}
