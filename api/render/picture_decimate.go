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
			lines, line = append(lines, straightened(line)), nil
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

// straight is the distance from a line within which a point does not bend it: a
// fifth of a dot of the finest picture.
const straight = vg.Length(0.075)

// straightened leaves out points that lie on the line between those kept, to
// within the distance above: from each kept point it looks along the directions
// that pass all points since closely enough, and keeps the last one before they
// would be missed or the line turns back.
func straightened(line []vg.Point) []vg.Point {
	if len(line) < 3 {
		return line
	}
	out := line[:1:1]
	var left, right vg.Point // bounds of the directions
	far := vg.Length(0)
	open := true // every direction passes
	restart := func() { far, open = 0, true }
	for i := 1; i < len(line); i++ {
		from := out[len(out)-1]
		d := line[i].Sub(from)
		reach := vg.Length(math.Hypot(float64(d.X), float64(d.Y)))
		if !open && (reach < far || cross(right, d) < 0 || cross(d, left) < 0) {
			out = append(out, line[i-1])
			restart()
			d = line[i].Sub(line[i-1])
			reach = vg.Length(math.Hypot(float64(d.X), float64(d.Y)))
		}
		far = reach
		if reach <= straight {
			continue
		}
		aside := vg.Point{X: -d.Y / reach * straight, Y: d.X / reach * straight}
		l, r := d.Add(aside), d.Sub(aside)
		if open || cross(l, left) > 0 {
			left = l
		}
		if open || cross(right, r) > 0 {
			right = r
		}
		open = false
	}
	return append(out, line[len(line)-1])
}

func cross(a, b vg.Point) vg.Length { return a.X*b.Y - a.Y*b.X }
