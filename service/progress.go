package service

import (
	"context"
	"sync/atomic"
)

// Meter counts the evaluations of one run, so that others can see how far it is.
// Use cases find it in their context; one that nobody watches counts all the same.
type Meter struct{ done, expected atomic.Int64 }

// Progress returns the evaluations done and those expected in all, 0 while that is
// not known.
func (m *Meter) Progress() (done, expected int64) { return m.done.Load(), m.expected.Load() }

// Expect adds evaluations to come.
func (m *Meter) Expect(n int) { m.expected.Add(int64(n)) }

// Add counts evaluations done.
func (m *Meter) Add(n int) { m.done.Add(int64(n)) }

type meterKey struct{}

// WithMeter returns a context whose use cases count on the meter.
func WithMeter(ctx context.Context, m *Meter) context.Context {
	return context.WithValue(ctx, meterKey{}, m)
}

// metered reports whether somebody watches the context's meter.
func metered(ctx context.Context) bool {
	_, is := ctx.Value(meterKey{}).(*Meter)
	return is
}

// MeterOf returns the context's meter, or one that nobody watches.
func MeterOf(ctx context.Context) *Meter {
	if m, ok := ctx.Value(meterKey{}).(*Meter); ok {
		return m
	}
	return new(Meter)
}
