package render

import "math"

// brush draws lines on a mask. A dot is covered as far as the line reaches past its
// middle, which differs from the area at the corners only. Where pieces of a line meet,
// and where it crosses itself, the piece counts that covers a dot most.
type brush struct {
	*mask
	aside float64 // [dots] half the width
}

// line draws a line with blunt ends, or its dashes.
func (s *brush) line(line []position, dashes []float64) {
	if len(dashes) == 0 {
		dashes = []float64{math.Inf(1)}
	}
	k, left := 0, dashes[0]
	begins := true
	for i, from := range line[:len(line)-1] {
		to, last := line[i+1], i == len(line)-2
		d := math.Hypot(to.x-from.x, to.y-from.y)
		for d > left {
			cut := position{from.x + (to.x-from.x)*left/d, from.y + (to.y-from.y)*left/d}
			if k%2 == 0 {
				s.piece(from, cut, begins, true)
			}
			d, from, begins = d-left, cut, true
			k = (k + 1) % len(dashes)
			left = dashes[k]
		}
		if d > 0 && k%2 == 0 {
			s.piece(from, to, begins, last)
			begins = false
		}
		left -= d
	}
}

// piece draws a straight piece. An end is blunt where the line or a dash ends, and
// round where it goes on.
func (s *brush) piece(a, b position, bluntA, bluntB bool) {
	length := math.Hypot(b.x-a.x, b.y-a.y)
	along := position{(b.x - a.x) / length, (b.y - a.y) / length}
	reach := s.aside + 0.5
	top, bottom := dotsWithin(min(a.y, b.y)-reach-float64(s.top), max(a.y, b.y)+reach-float64(s.top), s.tall)
	for row := top; row < bottom; row++ {
		y := float64(s.top+row) + 0.5 - a.y
		from, to := min(a.x, b.x)-reach, max(a.x, b.x)+reach
		if along.y != 0 {
			middle, half := a.x+y*along.x/along.y, reach/math.Abs(along.y)
			from, to = max(from, middle-half), min(to, middle+half)
		}
		left, right := dotsWithin(from-float64(s.left), to-float64(s.left), s.wide)
		dots := s.covered[row*s.wide:][:s.wide]
		x := float64(s.left+left) + 0.5 - a.x
		u, v := x*along.x+y*along.y, y*along.x-x*along.y
		for column := left; column < right; column, u, v = column+1, u+along.x, v-along.y {
			part := reach - math.Abs(v)
			if u < 0.5 || u > length-0.5 {
				part = s.atEnd(u, v, length, bluntA, bluntB)
			}
			if part > 0 {
				dots[column] = max(dots[column], uint8(math.MaxUint8*min(1, part)+0.5))
			}
		}
	}
}

// atEnd returns how far a dot is covered whose middle is so far along a piece and
// aside.
func (s *brush) atEnd(u, v, length float64, bluntA, bluntB bool) float64 {
	whole, away := 1.0, math.Abs(v)
	if bluntA {
		whole = min(whole, u+0.5)
	} else if u < 0 {
		away = math.Hypot(u, v)
	}
	if bluntB {
		whole = min(whole, length+0.5-u)
	} else if u > length {
		away = math.Hypot(u-length, v)
	}
	return max(0, whole) * min(1, s.aside+0.5-away)
}
