package api

import (
	"context"
	"errors"
	"net/http"
	"slices"
	"strconv"
	"time"

	"github.com/labstack/echo/v4"

	"railproof/api/exchange"
	"railproof/openapi"
	"railproof/service/jobs"
)

const (
	preferenceApplied = "Preference-Applied"
	pageDefault       = 50                     // entries
	waitMargin        = 500 * time.Millisecond // of a wait before the request's own time is over
	jobPoll           = 1                      // [s] when to look at a job again
)

// canDefer reports whether an operation may be answered by a job.
func canDefer(op openapi.Operation) bool { return slices.Contains(op.Statuses, http.StatusAccepted) }

// deferred keeps the request as a job and answers with the job, or with its result
// if that is there within the time to wait.
func (a *API) deferred(c echo.Context, op openapi.Operation, r *exchange.Request, p preference) error {
	ctx := c.Request().Context()
	c.Set(resultKey, r.ResultID)
	j, _, err := a.jobs.Submit(ctx, jobs.Request{Operation: op.ID, ResultID: r.ResultID, Body: r.Canonical()})
	if err != nil {
		return jobRefusal(err)
	}
	c.Set(jobKey, j.ID)
	h := c.Response().Header()
	h.Set(preferenceApplied, p.applied())
	h.Add(echo.HeaderVary, "Prefer")
	if p.wait > 0 {
		if j, err = a.jobs.Wait(ctx, j.ID, min(p.wait, a.deadline-waitMargin)); err != nil {
			return jobRefusal(err)
		}
		switch j.State {
		case jobs.Done:
			if answer, err := a.jobs.Result(ctx, j.ResultID); err == nil {
				form := c.Get(formKey).(string)
				body, problem := exchange.Show(answer, form, view(c))
				if problem != nil {
					return refusal{problem}
				}
				styled(c, form)
				h.Set(echo.HeaderCacheControl, "no-store")
				return c.Blob(http.StatusOK, form, body)
			}
		case jobs.Failed:
			return refusal{exchange.StoredProblem(&j)}
		case jobs.Waiting, jobs.Running, jobs.Cancelled:
		}
	}
	h.Set(echo.HeaderLocation, "/v1/jobs/"+j.ID)
	h.Set(echo.HeaderRetryAfter, strconv.Itoa(jobPoll))
	return a.checked(c, op.ID, http.StatusAccepted, a.shown(c, &j))
}

// jobKey is where the identifier of a job is left for the log.
const jobKey = "job"

// shown is the job with the addresses under which this server was reached.
func (a *API) shown(c echo.Context, j *jobs.Job) exchange.Job {
	out := exchange.EncodeJob(j)
	if out.Problem != nil {
		out.Problem.Type = baseURL(c.Request()) + out.Problem.Type
	}
	return out
}

// checked answers with a value that the contract accepts.
func (a *API) checked(c echo.Context, operation string, status int, value any) error {
	if faults := a.contract.ValidateResponse(operation, status, value); faults != nil {
		return errors.New("api: answer of " + operation + " breaks the contract at " + faults[0].Pointer + ": " + faults[0].Detail)
	}
	c.Response().Header().Set(echo.HeaderCacheControl, "no-store")
	return c.JSON(status, value)
}

func (a *API) getJob(c echo.Context) error {
	j, err := a.job(c)
	if err != nil {
		return err
	}
	if !j.State.Ended() {
		c.Response().Header().Set(echo.HeaderRetryAfter, strconv.Itoa(jobPoll))
	}
	return a.checked(c, "getJob", http.StatusOK, a.shown(c, &j))
}

// job finds the job that the path names.
func (a *API) job(c echo.Context) (jobs.Job, error) {
	if a.jobs == nil {
		return jobs.Job{}, jobRefusal(jobs.ErrUnknown)
	}
	id := c.Param("id")
	c.Set(jobKey, id)
	j, err := a.jobs.Get(c.Request().Context(), id)
	if err != nil {
		return j, jobRefusal(err)
	}
	return j, nil
}

func (a *API) listJobs(c echo.Context) error {
	limit := pageDefault
	if given := c.QueryParam("limit"); given != "" {
		limit, _ = strconv.Atoi(given) // the contract has checked it
	}
	page := exchange.JobsAnswer{Jobs: []exchange.Job{}}
	if a.jobs != nil {
		list, next, err := a.jobs.List(c.Request().Context(), c.QueryParam("cursor"), limit)
		if err != nil {
			return jobRefusal(err)
		}
		for i := range list {
			page.Jobs = append(page.Jobs, a.shown(c, &list[i]))
		}
		page.Next = next
	}
	return a.checked(c, "listJobs", http.StatusOK, page)
}

func (a *API) cancelJob(c echo.Context) error {
	if a.jobs == nil {
		return jobRefusal(jobs.ErrUnknown)
	}
	c.Set(jobKey, c.Param("id"))
	j, err := a.jobs.Cancel(c.Request().Context(), c.Param("id"))
	if err != nil {
		return jobRefusal(err)
	}
	return a.checked(c, "cancelJob", http.StatusOK, a.shown(c, &j))
}

// jobRefusal says what went wrong with a job in the contract's terms.
func jobRefusal(err error) error {
	switch {
	case errors.Is(err, jobs.ErrUnknown):
		return refusal{exchange.NewProblem(exchange.NotFound, "there is no such job, or it is no longer kept")}
	case errors.Is(err, jobs.ErrEnded):
		return refusal{exchange.NewProblem(exchange.Conflict, "the job has ended already")}
	case errors.Is(err, jobs.ErrCursor):
		return refusal{exchange.NewProblem(exchange.UnknownParameter, "cursor: take it from next of the page before")}
	case errors.Is(err, jobs.ErrFull):
		return refusal{later(exchange.NewProblem(exchange.Busy, "too many jobs are waiting"), 30)}
	case errors.Is(err, context.DeadlineExceeded), errors.Is(err, context.Canceled):
		return refusal{later(exchange.NewProblem(exchange.Deadline, "the time for this request ran out; the job goes on"), 5)}
	case errors.Is(err, jobs.ErrStorage):
		return refusal{later(exchange.NewProblem(exchange.Busy, "the store of jobs cannot be used right now"), 5)}
	}
	return err
}

// later adds when to try again.
func later(p *exchange.Problem, seconds int) *exchange.Problem {
	p.RetryAfter = seconds
	return p
}
