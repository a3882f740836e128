package api

import (
	"github.com/labstack/echo/v4"
	"go.opentelemetry.io/otel/attribute"
	"go.opentelemetry.io/otel/trace"
)

// describeSpan names the trace's span by the route, and says which request and which
// result it was. Without traces there is no span and nothing happens.
func describeSpan(c echo.Context) {
	span := trace.SpanFromContext(c.Request().Context())
	if !span.IsRecording() {
		return
	}
	span.SetName(c.Request().Method + " " + c.Path())
	span.SetAttributes(attribute.String("http.route", c.Path()), attribute.String("railproof.request_id", requestID(c)))
	for key, at := range map[string]string{"railproof.result_id": resultKey, "railproof.job": jobKey, "railproof.caller": callerKey} {
		if v, ok := c.Get(at).(string); ok {
			span.SetAttributes(attribute.String(key, v))
		}
	}
}
