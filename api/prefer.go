package api

import (
	"strconv"
	"strings"
	"time"
)

// preference is what a request prefers of RFC 7240.
type preference struct {
	async bool
	wait  time.Duration // how long to try first
	waits bool          // wait was given
}

// preferred reads the values of Prefer. What it does not know it passes over, as the
// standard wants; of one that is repeated the first counts.
func preferred(headers []string) preference {
	var p preference
	seen := map[string]bool{}
	for part := range strings.SplitSeq(strings.Join(headers, ","), ",") {
		token, _, _ := strings.Cut(part, ";") // parameters of a preference
		name, value, _ := strings.Cut(token, "=")
		name = strings.ToLower(strings.TrimSpace(name))
		value = strings.Trim(strings.TrimSpace(value), `"`)
		if seen[name] {
			continue
		}
		seen[name] = true
		switch name {
		case "respond-async":
			p.async = value == ""
		case "wait":
			if seconds, err := strconv.Atoi(value); err == nil && seconds >= 0 && seconds <= 86400 {
				p.wait, p.waits = time.Duration(seconds)*time.Second, true
			}
		}
	}
	return p
}

// applied is the Preference-Applied header.
func (p preference) applied() string {
	if p.waits {
		return "respond-async, wait=" + strconv.Itoa(int(p.wait.Seconds()))
	}
	return "respond-async"
}
