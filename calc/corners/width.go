package corners

import (
	"math"
	"slices"
)

// WidthShare is what one coordinate contributes to a worst case: how much the
// quantity gives back when that coordinate alone returns to its typical value.
type WidthShare struct {
	Coordinate int
	Change     float64 // [any] worst value less the value with this coordinate typical
	Share      float64 // [1] of the sum of the sizes of all changes
}

// WidthJob splits the worst case of every target among all coordinates.
type WidthJob struct {
	p        *Problem
	batch    batch
	extremes []Extreme
	first    []int
	started  bool
}

// NewWidth prepares the shares at the worst points found.
func NewWidth(p *Problem, extremes []Extreme) *WidthJob {
	return &WidthJob{p: p, extremes: extremes, first: make([]int, len(extremes))}
}

// Next implements Job.
func (j *WidthJob) Next() Work {
	if j.started {
		return nil
	}
	j.started = true
	j.batch.reset(j.p)
	for t := range j.extremes {
		j.first[t] = j.batch.len()
		if j.extremes[t].At == nil {
			continue
		}
		for i := range j.p.Coordinates {
			j.batch.moved(j.extremes[t].At, i, 0)
		}
	}
	j.batch.ready()
	return &j.batch
}

// Evaluations returns the number of evaluations handed out.
func (j *WidthJob) Evaluations() int { return j.batch.len() }

// Shares returns a target's shares, the greatest first; nil if it has no worst
// point. A coordinate without which the quantity has no value stands first with a
// NaN change.
func (j *WidthJob) Shares(target int) []WidthShare {
	e := &j.extremes[target]
	if e.At == nil {
		return nil
	}
	s := make([]WidthShare, len(j.p.Coordinates))
	sum := 0.0
	for i := range s {
		change := e.Value - j.batch.result(j.first[target] + i)[e.Quantity]
		s[i] = WidthShare{Coordinate: i, Change: change, Share: math.NaN()}
		if !math.IsNaN(change) {
			sum += math.Abs(change)
		}
	}
	for i := range s {
		switch {
		case sum == 0 && s[i].Change == 0:
			s[i].Share = 0
		case sum > 0:
			s[i].Share = s[i].Change / sum
			if e.Direction == Least {
				s[i].Share = -s[i].Share
			}
		}
	}
	slices.SortStableFunc(s, func(a, b WidthShare) int {
		x, y := math.Abs(a.Change), math.Abs(b.Change)
		switch {
		case x > y || math.IsNaN(x) && !math.IsNaN(y):
			return -1
		case x < y || math.IsNaN(y) && !math.IsNaN(x):
			return 1
		}
		return 0
	})
	return s
}
