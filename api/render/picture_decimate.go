package render

import (
	"math"

	"gonum.org/v1/plot/vg"
)

// decimate turns points into lines and keeps, of all points within a column of
// the given width, the first, the least, the greatest and the last, in their
// order. What is not finite interrupts a line.
func decimate(xs, ys []float64, x, y func(float64) vg.Length, column vg.Length) (lines [][]vg.Point) {
	var line []vg.Point
	var run struct {
		column                  float64
		start, least, most, end int
		open                    bool
	}
	place := func(i int) vg.Point { return vg.Point{X: x(xs[i]), Y: y(ys[i])} }
	closeRun := func() {
		if !run.open {
			return
		}
		last := -1
		for _, i := range [4]int{run.start, min(run.least, run.most), max(run.least, run.most), run.end} {
			if i != last {
				line = append(line, place(i))
			}
			last = i
		}
		run.open = false
	}
	finish := func() {
		closeRun()
		if len(line) > 0 {
			lines, line = append(lines, line), nil
		}
	}
	for i := range xs {
		at := place(i)
		if !finite(at) {
			finish()
			continue
		}
		c := math.Floor(float64(at.X / column))
		if !run.open || c != run.column {
			closeRun()
			run.column, run.start, run.least, run.most, run.end, run.open = c, i, i, i, i, true
			continue
		}
		if ys[i] < ys[run.least] {
			run.least = i
		}
		if ys[i] > ys[run.most] {
			run.most = i
		}
		run.end = i
	}
	finish()
	return lines
}
