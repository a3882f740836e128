package access

import (
	"container/list"
	"math"
	"sync"
	"time"

	"golang.org/x/time/rate"
)

// Limiter bounds the requests of each caller: a rate, and a burst above it. It is
// safe for concurrent use and bounded in memory.
type Limiter struct {
	rate    rate.Limit // [Hz]
	burst   int
	mutex   sync.Mutex
	callers map[string]*list.Element
	recent  *list.List // of *bucket, the last one seen in front
}

type bucket struct {
	caller string
	tokens *rate.Limiter
}

// mostCallers bounds what is remembered. Whoever is forgotten starts with a full
// burst.
const mostCallers = 20_000

// NewLimiter allows each caller perSecond requests in the long run and burst at once.
func NewLimiter(perSecond float64, burst int) *Limiter {
	return &Limiter{rate: rate.Limit(perSecond), burst: burst, callers: map[string]*list.Element{}, recent: list.New()}
}

// Quota is what a caller has left.
type Quota struct {
	Allowed   bool
	Remaining int           // requests
	Restored  time.Duration // until the quota is full again
	Retry     time.Duration // until the next request is allowed; 0 if this one was
}

// Take counts a request of a caller.
func (l *Limiter) Take(caller string, now time.Time) Quota {
	b := l.bucket(caller)
	q := Quota{Allowed: b.AllowN(now, 1)}
	left := b.TokensAt(now)
	q.Remaining = max(0, int(left))
	q.Restored = l.seconds(float64(l.burst) - left)
	if !q.Allowed {
		q.Retry = l.seconds(1 - left)
	}
	return q
}

func (l *Limiter) seconds(tokens float64) time.Duration {
	return time.Duration(math.Max(0, tokens) / float64(l.rate) * float64(time.Second))
}

func (l *Limiter) bucket(caller string) *rate.Limiter {
	l.mutex.Lock()
	defer l.mutex.Unlock()
	if at := l.callers[caller]; at != nil {
		l.recent.MoveToFront(at)
		return at.Value.(*bucket).tokens
	}
	b := &bucket{caller, rate.NewLimiter(l.rate, l.burst)}
	l.callers[caller] = l.recent.PushFront(b)
	if len(l.callers) > mostCallers {
		delete(l.callers, l.recent.Remove(l.recent.Back()).(*bucket).caller)
	}
	return b.tokens
}

// Policy returns the burst, and the time in which it is restored.
func (l *Limiter) Policy() (quota int, window time.Duration) {
	return l.burst, l.seconds(float64(l.burst))
}
