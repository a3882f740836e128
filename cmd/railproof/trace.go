package main

import (
	"context"
	"fmt"
	"net/http"

	"go.opentelemetry.io/contrib/exporters/autoexport"
	"go.opentelemetry.io/contrib/instrumentation/net/http/otelhttp"
	"go.opentelemetry.io/otel/attribute"
	"go.opentelemetry.io/otel/codes"
	"go.opentelemetry.io/otel/propagation"
	sdktrace "go.opentelemetry.io/otel/sdk/trace"
	"go.opentelemetry.io/otel/trace"

	"railproof/api/exchange"
	"railproof/service"
	"railproof/service/jobs"
)

// traceVariables are those of the OpenTelemetry specification that ask for traces.
// Without one of them nothing is recorded and nothing is set up.
var traceVariables = []string{"OTEL_TRACES_EXPORTER", "OTEL_EXPORTER_OTLP_ENDPOINT", "OTEL_EXPORTER_OTLP_TRACES_ENDPOINT"}

// tracing records requests and jobs as the environment says; nil records nothing.
type tracing struct{ provider *sdktrace.TracerProvider }

func newTracing(ctx context.Context, env func(string) string) (*tracing, error) {
	asked := false
	for _, name := range traceVariables {
		asked = asked || env(name) != ""
	}
	if !asked || env("OTEL_SDK_DISABLED") == "true" || env("OTEL_TRACES_EXPORTER") == "none" {
		return nil, nil
	}
	exporter, err := autoexport.NewSpanExporter(ctx)
	if err != nil {
		return nil, fmt.Errorf("traces: %w", err)
	}
	return &tracing{sdktrace.NewTracerProvider(sdktrace.WithBatcher(exporter))}, nil
}

// end sends what is not sent yet.
func (t *tracing) end(ctx context.Context) error {
	if t == nil {
		return nil
	}
	return t.provider.Shutdown(ctx)
}

// requests wraps a handler so that each request is a span. One that carries a
// traceparent (W3C Trace Context) goes on with its caller's trace.
func (t *tracing) requests(handler http.Handler) http.Handler {
	if t == nil {
		return handler
	}
	return otelhttp.NewHandler(handler, "request",
		otelhttp.WithTracerProvider(t.provider), otelhttp.WithPropagators(propagation.TraceContext{}), otelhttp.WithSpanNameFormatter(spanName))
}

// spanName is the method until the route is known; the address itself has no end of
// values.
func spanName(_ string, r *http.Request) string { return r.Method }

// jobs wraps an executor so that each run of a job, or of a part of one, is a span.
func (t *tracing) jobs(e exchange.Executor) jobs.Executor {
	if t == nil {
		return e
	}
	return &tracedExecutor{e, t.provider.Tracer("railproof")}
}

type tracedExecutor struct {
	exchange.Executor
	tracer trace.Tracer
}

// Execute implements jobs.Executor.
func (e *tracedExecutor) Execute(ctx context.Context, operation string, request []byte, m *service.Meter) jobs.Outcome {
	ctx, span := e.tracer.Start(ctx, "job "+operation)
	o := e.Executor.Execute(ctx, operation, request, m)
	describe(span, m, o)
	return o
}

// Part implements jobs.Splitter.
func (e *tracedExecutor) Part(ctx context.Context, operation string, request []byte, part, parts int, m *service.Meter) ([]byte, error) {
	ctx, span := e.tracer.Start(ctx, "job part "+operation, trace.WithAttributes(attribute.Int("railproof.part", part), attribute.Int("railproof.parts", parts)))
	body, err := e.Executor.Part(ctx, operation, request, part, parts, m)
	if err != nil {
		span.SetStatus(codes.Error, "not done")
	}
	span.End()
	return body, err
}

// Merge implements jobs.Splitter.
func (e *tracedExecutor) Merge(ctx context.Context, operation string, request []byte, parts [][]byte) jobs.Outcome {
	ctx, span := e.tracer.Start(ctx, "job merge "+operation)
	o := e.Executor.Merge(ctx, operation, request, parts)
	describe(span, nil, o)
	return o
}

// describe ends the span of a job and says what became of it.
func describe(span trace.Span, m *service.Meter, o jobs.Outcome) {
	if m != nil {
		done, _ := m.Progress()
		span.SetAttributes(attribute.Int64("railproof.evaluations", done))
	}
	if o.ResultID != "" {
		span.SetAttributes(attribute.String("railproof.result_id", o.ResultID))
	} else {
		span.SetStatus(codes.Error, "no result")
	}
	span.End()
}
