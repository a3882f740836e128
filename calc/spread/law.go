package spread

import "math"

// law is the distribution of one coordinate z in [-1, 1], ready for use.
//
// A value on its own follows its distribution between min and max, so with the
// typical value off the middle the two sides of z carry different shares of the
// probability: p = (typ - min)/(max - min) of it lies below. The members of a group
// share a coordinate whose sides carry half each.
type law struct {
	to    int // its coordinate
	kind  Distribution
	below float64    // share of the width below the typical value
	side  [2]float64 // factor from the distribution's own scale to z: above, below
	tail  float64    // normal: probability cut off at the lower end
	rest  float64    // normal: probability between the ends
}

func newLaw(to int, kind Distribution, below float64) law {
	l := law{to: to, kind: kind, below: below}
	scale := 1.0
	if kind == Normal {
		const width = 6 // standard deviations from min to max
		scale = width
		l.tail = normalBelow(-width * below)
		l.rest = normalBelow(width*(1-below)) - l.tail
	}
	if below < 1 {
		l.side[0] = 1 / (scale * (1 - below))
	}
	if below > 0 {
		l.side[1] = 1 / (scale * below)
	}
	return l
}

// place sets z[l.to] to the coordinate whose cumulative probability is u[l.to],
// 0 < u < 1.
//
//	uniform     w = u - p
//	triangular  z = sqrt(u/p) - 1 for u < p, else 1 - sqrt((1-u)/(1-p))
//	normal      w = Phi^-1(Phi(-6p) + u (Phi(6(1-p)) - Phi(-6p)))
//
// with z = w over the width of w's side. One loop per distribution keeps the
// processor's pipeline full; the sign of w selects its side without a branch.
func (s *Set) place(u, z []float64) {
	for i := range s.uniform {
		l := &s.uniform[i]
		w := u[l.to] - l.below
		z[l.to] = w * l.side[math.Float64bits(w)>>63]
	}
	for i := range s.triangular {
		l := &s.triangular[i]
		if x := u[l.to]; x < l.below {
			z[l.to] = math.Sqrt(x*l.side[1]) - 1
		} else {
			z[l.to] = 1 - math.Sqrt((1-x)*l.side[0])
		}
	}
	for i := range s.normal {
		l := &s.normal[i]
		w := normalQuantile(l.tail + u[l.to]*l.rest)
		w *= l.side[math.Float64bits(w)>>63]
		if w > 1 {
			w = 1
		} else if w < -1 {
			w = -1
		}
		z[l.to] = w
	}
}

// Moments are the first two moments of a coordinate above and below zero,
// unnormalised, so that the variance of any function that is linear on each side
// follows.
type Moments struct {
	Above, AboveSquare float64 // [1] E[z; z > 0], E[z^2; z > 0]
	Below, BelowSquare float64 // [1] E[z; z < 0], E[z^2; z < 0]
}

// Deviation returns the standard deviation of a response with the given slopes
// above and below zero.
func (m *Moments) Deviation(above, below float64) float64 {
	mean := above*m.Above + below*m.Below
	return math.Sqrt(max(0, above*above*m.AboveSquare+below*below*m.BelowSquare-mean*mean))
}

func (l *law) moments() Moments {
	first, second := 1.0/2, 1.0/3
	switch l.kind {
	case Triangular:
		first, second = 1.0/3, 1.0/6
	case Normal:
		var m Moments
		if l.side[0] > 0 {
			m.Above, m.AboveSquare = l.normalSide(1 / l.side[0])
		}
		if l.side[1] > 0 {
			m.Below, m.BelowSquare = l.normalSide(1 / l.side[1])
			m.Below = -m.Below
		}
		return m
	}
	above := 1 - l.below
	return Moments{above * first, above * second, -l.below * first, l.below * second}
}

// normalSide integrates z = t/end and its square over the normal density from 0
// to end standard deviations.
func (l *law) normalSide(end float64) (first, second float64) {
	first = (normalDensity(0) - normalDensity(end)) / (l.rest * end)
	second = (normalBelow(end) - 0.5 - end*normalDensity(end)) / (l.rest * end * end)
	return first, second
}
