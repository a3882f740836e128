package statespace

import "math"

// Map carries a point over a fixed time: x(t) = F z, u(t) = u + Rate t.
type Map struct {
	N, M int
	Time float64                    // [s]
	F    [MaxStates * Width]float64 // [any] row by row, N rows of N+M
	Rate [MaxInputs]float64         // [any/s]
}

const (
	// taylorNorm is the largest norm of A t for which the series is used
	// directly, and taylorTerms the number of its terms: the first one left out
	// is below 0.5^15/15! = 2e-17 of the first.
	taylorNorm  = 0.5
	taylorTerms = 14
	// maxHalvings bounds the stiffness: squaring multiplies rounding by two each
	// time, so 2^34 time constants leave six digits.
	maxHalvings = 34
)

// Exp sets m to the exact map of s over the time t >= 0, by scaling, Taylor
// series and squaring. Method: C. Moler, C. Van Loan, "Nineteen dubious ways to
// compute the exponential of a matrix", SIAM Review 45 (2003), method 3
// (remembered, unverified). It reports false for a system too stiff for the time,
// whose map would be rounding only.
func (m *Map) Exp(s *System, t float64, work *Map) bool {
	halvings := halvingsFor(s, t, taylorNorm)
	if halvings > maxHalvings {
		return false
	}
	from, to := m, work
	if halvings%2 == 1 {
		from, to = work, m
	}
	from.series(s, math.Ldexp(t, -halvings), taylorTerms, to)
	for range halvings {
		to.Compose(from, from)
		from, to = to, from
	}
	m.Time = t
	return true
}

// halvingsFor returns how often t must be halved for the norm of A t to be at
// most limit.
func halvingsFor(s *System, t, limit float64) int {
	norm := s.norm() * t
	n := 0
	for norm > limit && n <= maxHalvings {
		norm /= 2
		n++
	}
	return n
}

// norm returns the smaller of the greatest row sum and the greatest column sum
// of A.
func (s *System) norm() float64 {
	w := s.N + s.M
	var rows, columns float64
	for i := 0; i < s.N; i++ {
		var row, column float64
		for j := 0; j < s.N; j++ {
			row += math.Abs(s.A[i*w+j])
			column += math.Abs(s.A[j*w+i])
		}
		rows, columns = max(rows, row), max(columns, column)
	}
	return min(rows, columns)
}

// series sums the exponential series of the augmented matrix [A B; 0 S] t, where
// S takes the constant input to the rates of the others, so that S^2 = 0.
func (m *Map) series(s *System, t float64, terms int, term *Map) {
	n, k := s.N, s.M
	w := n + k
	m.N, m.M, m.Time, m.Rate = n, k, t, s.Rate
	clear(m.F[:n*w])
	for i := 0; i < n; i++ {
		m.F[i*w+i] = 1
		for j := 0; j < w; j++ {
			x := s.A[i*w+j] * t
			term.F[i*w+j] = x
			m.F[i*w+j] += x
		}
	}
	var spare [MaxStates * Width]float64
	last, next := term.F[:n*w], spare[:n*w]
	for p := 2; p <= terms; p++ {
		f := t / float64(p)
		for i := 0; i < n; i++ {
			row := next[i*w : i*w+w]
			clear(row)
			for j, a := range s.A[i*w : i*w+n] { // a circuit couples each state to few others
				if a == 0 {
					continue
				}
				for c, x := range last[j*w : j*w+w] {
					row[c] += float64(a * x)
				}
			}
			if p == 2 {
				// The ramps enter through [A B] [0; S] in the second term only.
				for r := 0; r < k; r++ {
					row[w-1] += s.A[i*w+n+r] * s.Rate[r] * t
				}
			}
			sum := m.F[i*w : i*w+w]
			for c := range row {
				row[c] *= f
				sum[c] += row[c]
			}
		}
		last, next = next, last
	}
}

// Compose sets m to the map that first does a, then b; m is neither of them.
// The inputs' rates are those of b, and must be equal in both.
func (m *Map) Compose(b, a *Map) {
	n, k := a.N, a.M
	w := n + k
	m.N, m.M, m.Time, m.Rate = n, k, a.Time+b.Time, b.Rate
	for i := 0; i < n; i++ {
		bi, mi := b.F[i*w:i*w+w], m.F[i*w:i*w+w]
		clear(mi[:n])
		copy(mi[n:], bi[n:])
		for r := 0; r < k-1; r++ {
			mi[w-1] += bi[n+r] * a.Rate[r] * a.Time
		}
		for j, x := range bi[:n] {
			if x == 0 {
				continue
			}
			aj := a.F[j*w : j*w+w]
			for c := range mi {
				mi[c] += float64(x * aj[c])
			}
		}
	}
}

// Apply sets dst to the point that z becomes; dst is not z.
func (m *Map) Apply(dst, z *Point) {
	n, w := m.N, m.N+m.M
	times(dst[:n], m.F[:], z[:w], w)
	for k := 0; k < m.M; k++ {
		dst[n+k] = z[n+k] + float64(m.Rate[k]*m.Time)
	}
}

// Identity makes m the map over no time.
func (m *Map) Identity(n, k int) {
	m.N, m.M, m.Time, m.Rate = n, k, 0, [MaxInputs]float64{}
	clear(m.F[:n*(n+k)])
	for i := 0; i < n; i++ {
		m.F[i*(n+k)+i] = 1
	}
}
