package service

import (
	"sync/atomic"

	"railproof/calc/evaluate"
)

// WorkDone counts evaluations since the start, and those that ended badly.
type WorkDone struct{ Evaluations, NotConverged, Runaway atomic.Int64 }

// WorkDone returns the counts; they go on.
func (s *Service) WorkDone() *WorkDone { return &s.done }

// count adds one evaluation for each status.
func (w *WorkDone) count(list ...evaluate.Status) {
	w.Evaluations.Add(int64(len(list)))
	for _, status := range list {
		w.bad(status, 1)
	}
}

func (w *WorkDone) bad(status evaluate.Status, n int) {
	switch status {
	case evaluate.NotConverged:
		w.NotConverged.Add(int64(n))
	case evaluate.Runaway:
		w.Runaway.Add(int64(n))
	}
}

// corners adds the evaluations of an analysis.
func (w *WorkDone) corners(a *CornersAnswer) {
	w.Evaluations.Add(int64(a.Evaluations))
	if a.Run != nil {
		for _, f := range a.Run.Failures() {
			w.bad(f.Status, f.Count)
		}
	}
}
