package api

import (
	"sync"

	"github.com/labstack/echo/v4"

	"railproof/api/exchange"
)

// rulePacks serves the list of rule packs. Packs are compiled on first use, not when
// the server starts.
func (a *API) rulePacks() echo.HandlerFunc {
	serve := sync.OnceValue(func() echo.HandlerFunc {
		answer, problem := a.exchange.RulePacks()
		if problem != nil {
			return func(echo.Context) error { return refusal{problem} }
		}
		return document("application/json", answer.Body)
	})
	return func(c echo.Context) error { return serve()(c) }
}

// rulePack serves one rule pack.
func (a *API) rulePack() echo.HandlerFunc {
	all := sync.OnceValues(func() (map[string]echo.HandlerFunc, *exchange.Problem) {
		answers, problem := a.exchange.RulePackDocuments()
		handlers := map[string]echo.HandlerFunc{}
		for id, answer := range answers {
			handlers[id] = document("application/json", answer.Body)
		}
		return handlers, problem
	})
	return func(c echo.Context) error {
		handlers, problem := all()
		if problem != nil {
			return refusal{problem}
		}
		if handle := handlers[c.Param("id")]; handle != nil {
			return handle(c)
		}
		return refusal{exchange.NewProblem(exchange.NotFound, "the service has no rule pack of this name")}
	}
}
