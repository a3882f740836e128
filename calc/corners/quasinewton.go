package corners

import "math"

// quasiNewton keeps the inverse of a score's negative curvature by the
// Broyden-Fletcher-Goldfarb-Shanno update, started from the diagonal that the
// differences give.
//
// Source: J. Nocedal, S. J. Wright, "Numerical Optimization", 2nd ed., 2006,
// equation 6.17.
type quasiNewton struct {
	n              int
	inverse        []float64 // n x n
	at, slope      []float64 // of the last update
	known, learned bool
	s, y, hy, out  []float64
}

func newQuasiNewton(n int) quasiNewton {
	return quasiNewton{
		n: n, inverse: make([]float64, n*n), at: make([]float64, n), slope: make([]float64, n),
		s: make([]float64, n), y: make([]float64, n), hy: make([]float64, n), out: make([]float64, n),
	}
}

func (q *quasiNewton) reset() { q.known, q.learned = false, false }

// update takes in the slope at a point; newton gives the first diagonal.
func (q *quasiNewton) update(at, slope, newton []float64) {
	if !q.known {
		clear(q.inverse)
		for i := range slope {
			if slope[i] != 0 {
				q.inverse[i*q.n+i] = newton[i] / slope[i]
			}
		}
	} else {
		sy, ss, yy := 0.0, 0.0, 0.0
		for i := range q.s {
			q.s[i], q.y[i] = at[i]-q.at[i], q.slope[i]-slope[i]
			sy += q.s[i] * q.y[i]
			ss += q.s[i] * q.s[i]
			yy += q.y[i] * q.y[i]
		}
		if sy > 1e-8*math.Sqrt(ss*yy) {
			q.bend(sy)
			q.learned = true
		}
	}
	q.known = true
	copy(q.at, at)
	copy(q.slope, slope)
}

// bend applies H <- (I - s y'/sy) H (I - y s'/sy) + s s'/sy.
func (q *quasiNewton) bend(sy float64) {
	yhy := 0.0
	for i := range q.hy {
		q.hy[i] = 0
		for j := range q.y {
			q.hy[i] += q.inverse[i*q.n+j] * q.y[j]
		}
		yhy += q.y[i] * q.hy[i]
	}
	for i := range q.s {
		for j := range q.s {
			q.inverse[i*q.n+j] += (1+yhy/sy)*q.s[i]*q.s[j]/sy - (q.hy[i]*q.s[j]+q.s[i]*q.hy[j])/sy
		}
	}
}

// direction returns the uphill step, or nil while it would be the diagonal one. A
// coordinate without slope, such as one held at its end, does not move.
func (q *quasiNewton) direction(slope []float64) []float64 {
	if !q.learned {
		return nil
	}
	for i := range q.out {
		q.out[i] = 0
		if slope[i] == 0 {
			continue
		}
		for j := range slope {
			q.out[i] += q.inverse[i*q.n+j] * slope[j]
		}
	}
	return q.out
}
