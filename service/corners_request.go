package service

import (
	"math"

	"railproof/calc/corners"
	"railproof/calc/quantity"
	"railproof/calc/rules"
	"railproof/calc/sampling"
	"railproof/calc/stage"
)

// CornersRequest asks for the worst case of a stage over its spreads and
// conditions.
type CornersRequest struct {
	Design     Design
	Conditions stage.Conditions
	Limits     []CornersLimit
	Elsewhere  []string      // pointers to limits on transients, which corners do not look at
	Further    []quantity.ID // to report without a limit
	Methods    CornersMethods
	Sampling   sampling.Design // Coordinates is filled in
	First      int             // number of the first sample
	At         []stage.Point   // condition corners; empty: those of the worst points
	Confidence float64         // [1]
	Coverage   float64         // [1]
	Quantiles  []float64       // [1] probabilities
	Worst      int             // samples told per target
	Base       int             // rows of the attribution
	ModelBands bool
	Drifts     []corners.Scale
}

// CornersMethods tells which parts of the analysis are wanted.
type CornersMethods struct{ ExtremeValue, RootSumSquare, MonteCarlo, Attribution bool }

// CornersLimit bounds one quantity.
type CornersLimit struct {
	Quantity quantity.ID
	Min, Max float64 // [any] NaN: none
	Where    rules.Where
	At       string // pointer in the request: "/limits/0"
}

// Broken reports whether the value breaks the limit.
func (l *CornersLimit) Broken(v float64) bool { return v < l.Min || v > l.Max }

// margin returns the distance of a value to the nearer bound, over the bound's
// size; negative beyond it, NaN where that says nothing.
func (l *CornersLimit) margin(v float64) float64 {
	m := math.NaN()
	for _, d := range []float64{(l.Max - v) / math.Abs(l.Max), (v - l.Min) / math.Abs(l.Min)} {
		if d < m || math.IsNaN(m) {
			m = d
		}
	}
	if math.IsInf(m, 0) {
		return math.NaN()
	}
	return m
}

// Refusal is something in a request that can be read and not be done.
type Refusal struct {
	Pointer, Keyword, Detail, Limit, Received string
}
