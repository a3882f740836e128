package api

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"net/http"
	"strconv"
	"time"

	"github.com/labstack/echo/v4"

	"railproof/api/exchange"
	"railproof/service/jobs"
)

const (
	mostStreams    = 256              // open at once
	streamSilence  = 15 * time.Second // after which a comment keeps the connection
	streamReturn   = 1000             // [ms] after which a client that was cut off comes back
	eventWriteTime = 10 * time.Second // for one event; a client that does not read is let go
)

// jobEvents streams a job as server-sent events: one per change, numbered, until it
// has ended. Last-Event-ID resumes behind an event; since each holds the whole job,
// only the newest matters.
func (a *API) jobEvents(c echo.Context) error {
	j, err := a.job(c)
	if err != nil {
		return err
	}
	if c.Request().Method == http.MethodHead {
		c.Response().Header().Set(echo.HeaderContentType, eventStream)
		return c.NoContent(http.StatusOK)
	}
	if a.streams.Add(1) > mostStreams {
		a.streams.Add(-1)
		return refusal{later(exchange.NewProblem(exchange.Busy, "too many event streams are open; poll the job instead"), 5)}
	}
	defer a.streams.Add(-1)
	ctx, cancel := context.WithCancel(c.Request().Context())
	defer cancel()
	defer context.AfterFunc(a.ending, cancel)()
	s := stream{c, http.NewResponseController(c.Response())}
	if err := s.open(); err != nil {
		return nil
	}
	since, err := strconv.ParseInt(c.Request().Header.Get("Last-Event-ID"), 10, 64)
	if err != nil || since < 0 || since > j.Sequence {
		since = 0
	}
	for {
		if j.Sequence > since || j.State.Ended() {
			if s.event(j.Sequence, a.shown(c, &j)) != nil || j.State.Ended() {
				return nil
			}
			since = j.Sequence
		}
		if j, err = a.nextEvent(ctx, s, j.ID, since); err != nil {
			return nil // the client or the server goes, or the job is gone; the client comes back
		}
	}
}

// nextEvent waits for a change of the job and keeps the connection alive meanwhile.
func (a *API) nextEvent(ctx context.Context, s stream, id string, since int64) (jobs.Job, error) {
	for {
		silence, cancel := context.WithTimeout(ctx, streamSilence)
		j, err := a.jobs.Next(silence, id, since)
		cancel()
		if !errors.Is(err, context.DeadlineExceeded) {
			return j, err
		}
		if err := s.write(": waiting\n\n"); err != nil {
			return j, err
		}
	}
}

const eventStream = "text/event-stream"

// stream writes events and flushes each.
type stream struct {
	c       echo.Context
	control *http.ResponseController
}

func (s stream) open() error {
	h := s.c.Response().Header()
	h.Set(echo.HeaderContentType, eventStream)
	h.Set(echo.HeaderCacheControl, "no-store")
	h.Set("X-Accel-Buffering", "no")
	s.c.Response().WriteHeader(http.StatusOK)
	return s.write(fmt.Sprintf("retry: %d\n\n", streamReturn))
}

func (s stream) event(id int64, value any) error {
	data, err := json.Marshal(value)
	if err != nil {
		return err
	}
	return s.write(fmt.Sprintf("id: %d\ndata: %s\n\n", id, data))
}

func (s stream) write(text string) error {
	if err := s.control.SetWriteDeadline(time.Now().Add(eventWriteTime)); err != nil && !errors.Is(err, http.ErrNotSupported) {
		return err
	}
	if _, err := s.c.Response().Write([]byte(text)); err != nil {
		return err
	}
	return s.control.Flush()
}
