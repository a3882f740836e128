package api

import (
	"net/url"

	"github.com/labstack/echo/v4"

	"railproof/api/exchange"
	"railproof/openapi"
)

// checkParameters refuses query and path parameters that the contract does not
// take.
func (a *API) checkParameters(op openapi.Operation, next echo.HandlerFunc) echo.HandlerFunc {
	return func(c echo.Context) error {
		var query url.Values
		if raw := c.Request().URL.RawQuery; raw != "" {
			q, err := url.ParseQuery(raw)
			if err != nil {
				return refusal{exchange.NewProblem(exchange.UnknownParameter, "the query cannot be read")}
			}
			query = q
		}
		if faults := a.contract.ValidateQuery(op.ID, query); faults != nil {
			return refusal{exchange.Schema(exchange.UnknownParameter, faults)}
		}
		for _, p := range op.InPath {
			if faults := a.contract.ValidatePathParameter(op.ID, p.Name, c.Param(p.Name)); faults != nil {
				return refusal{exchange.Schema(exchange.UnknownParameter, faults)}
			}
		}
		return next(c)
	}
}
