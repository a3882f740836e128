package api

import (
	"net/http"
	"strings"

	"github.com/labstack/echo/v4"

	"railproof/openapi"
)

// routes binds every operation of the contract that has a handler. A handler
// without an operation is a bug and found at start.
func (a *API) routes() {
	handlers := a.handlers()
	for _, op := range a.contract.Operations() {
		handler := handlers[op.ID]
		if a.exchange.Computes(op.ID) {
			handler = a.compute(op)
		}
		if handler == nil {
			continue
		}
		delete(handlers, op.ID)
		a.bind(op, handler)
	}
	for id := range handlers {
		panic("api: no operation " + id + " in the contract")
	}
}

// handlers are the operations that take no body, by their identifiers.
func (a *API) handlers() map[string]echo.HandlerFunc {
	h := map[string]echo.HandlerFunc{
		"getContractJson": document("application/json", openapi.JSON()),
		"getContractYaml": document("application/yaml", openapi.YAML()),
		"getDocs":         a.overview(),
		"getDocsPage":     a.docsPages(),
		"getDocsAsset":    docsAssets(),
		"getProblemPage":  a.problemPages(),
		"getExample":      example(),
		"getHealth":       health,
		"getReadiness":    a.readiness,
		"listRulePacks":   a.rulePacks(),
		"getRulePack":     a.rulePack(),
		"listJobs":        a.listJobs,
		"getJob":          a.getJob,
		"cancelJob":       a.cancelJob,
		"getJobEvents":    a.jobEvents,
		"getResult":       a.getResult,
		"getMetrics":      a.metrics.handler(),
	}
	for id, answer := range a.exchange.Dictionaries() {
		h[id] = document("application/json", answer.Body)
	}
	return h
}

// bind routes an operation. Query parameters that the contract does not know are
// refused before the handler runs; HEAD is answered wherever GET is.
func (a *API) bind(op openapi.Operation, handler echo.HandlerFunc) {
	path := strings.NewReplacer("{", ":", "}", "").Replace(op.Path)
	checked := a.guard(op, a.checkParameters(op, a.checkAccept(op, handler)))
	a.echo.Add(op.Method, path, checked)
	if op.Method == http.MethodGet {
		a.echo.Add(http.MethodHead, path, checked)
	}
}

// Missing returns the operations of the contract that have no handler.
func (a *API) Missing() []string {
	bound := map[string]bool{}
	for _, r := range a.echo.Routes() {
		bound[r.Method+" "+r.Path] = true
	}
	var missing []string
	for _, op := range a.contract.Operations() {
		if !bound[op.Method+" "+strings.NewReplacer("{", ":", "}", "").Replace(op.Path)] {
			missing = append(missing, op.ID)
		}
	}
	return missing
}
