package main

import (
	"context"
	"fmt"
	"net/http"

	"go.opentelemetry.io/contrib/exporters/autoexport"
	"go.opentelemetry.io/contrib/instrumentation/net/http/otelhttp"
	sdktrace "go.opentelemetry.io/otel/sdk/trace"
)

// traceVariables are those of the OpenTelemetry specification that ask for traces.
// Without one of them nothing is recorded and nothing is set up.
var traceVariables = []string{"OTEL_TRACES_EXPORTER", "OTEL_EXPORTER_OTLP_ENDPOINT", "OTEL_EXPORTER_OTLP_TRACES_ENDPOINT"}

// traced wraps a handler so that its requests are recorded as the environment says.
// end sends what is not sent yet.
func traced(ctx context.Context, handler http.Handler, env func(string) string) (wrapped http.Handler, end func(context.Context) error, err error) {
	nothing := func(context.Context) error { return nil }
	asked := false
	for _, name := range traceVariables {
		asked = asked || env(name) != ""
	}
	if !asked || env("OTEL_SDK_DISABLED") == "true" || env("OTEL_TRACES_EXPORTER") == "none" {
		return handler, nothing, nil
	}
	exporter, err := autoexport.NewSpanExporter(ctx)
	if err != nil {
		return nil, nil, fmt.Errorf("traces: %w", err)
	}
	provider := sdktrace.NewTracerProvider(sdktrace.WithBatcher(exporter))
	return otelhttp.NewHandler(handler, "request", otelhttp.WithTracerProvider(provider), otelhttp.WithSpanNameFormatter(spanName)), provider.Shutdown, nil
}

// spanName is the method until the route is known; the address itself has no end of
// values.
func spanName(_ string, r *http.Request) string { return r.Method }
