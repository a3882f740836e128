package api

import (
	"net/http"

	"github.com/labstack/echo/v4"
)

type healthBody struct {
	Status string `json:"status"`
}

type readinessBody struct {
	Status  string   `json:"status"`
	Reasons []string `json:"reasons"`
}

// health tells that the process is alive.
func health(c echo.Context) error { return c.JSON(http.StatusOK, healthBody{"ok"}) }

// readiness tells whether new work should be sent here, and if not, why.
func (a *API) readiness(c echo.Context) error {
	if a.ending.Err() != nil {
		return c.JSON(http.StatusServiceUnavailable, readinessBody{"draining", []string{"the server is shutting down"}})
	}
	if a.jobs != nil {
		if trouble := a.jobs.Trouble(); trouble != "" {
			return c.JSON(http.StatusServiceUnavailable, readinessBody{"unavailable", []string{"the store of jobs cannot be used: " + trouble}})
		}
	}
	return c.JSON(http.StatusOK, readinessBody{"ok", []string{}})
}
