package loop

import (
	"math"
	"math/cmplx"

	"railproof/calc/statespace"
	"railproof/calc/switched"
)

const (
	searchSpan    = 3e5 // [1] half the decision rate over the lowest frequency searched
	perDecade     = 32  // [1] points of the plain grid
	plainPoints   = 176 // [1] perDecade log10(searchSpan), rounded up
	perMode       = 11  // [1] points set around each oscillating eigenvalue
	maxGrid       = plainPoints + 2*perMode*switched.MaxPhases*statespace.MaxStates/2 + 3
	refinements   = 60    // [1] bound on the steps of one refinement
	resolution    = 1e-10 // [1] relative, of a refined frequency
	besideNyquist = 1e-6  // [1] last point before half the decision rate, at which a sampled gain is real whatever its phase before
	cornerOffset  = 8     // [1] half-widths of a resonance covered on each side
)

// scan is the grid on which a loop gain is searched: logarithmic, with further
// points where an eigenvalue makes it change quickly, so that a narrow resonance
// cannot hide between two points.
type scan struct {
	nyquist   float64
	count     int
	frequency [maxGrid]float64
	gain      [maxGrid]complex128
}

func (g *scan) reset(nyquist float64) {
	g.nyquist, g.count = nyquist, plainPoints
	step := math.Pow(searchSpan, 1/float64(plainPoints-1))
	f := nyquist / searchSpan
	for i := range plainPoints {
		g.frequency[i] = f
		f *= step
	}
	g.frequency[plainPoints-1] = nyquist
	g.insert(nyquist * (1 - besideNyquist))
}

// around adds points about a frequency, spread over the given half-width [Hz].
func (g *scan) around(f, half float64) {
	offsets := [perMode]float64{-cornerOffset, -4, -2, -1, -0.5, 0, 0.5, 1, 2, 4, cornerOffset}
	half = max(half, 1e-6*f)
	for _, o := range offsets {
		g.insert(f + o*half)
	}
}

func (g *scan) insert(f float64) {
	if !(f > g.frequency[0] && f < g.nyquist) || g.count == maxGrid {
		return
	}
	lo, hi := 0, g.count-1 // f lies in (frequency[lo], frequency[hi])
	for hi-lo > 1 {
		mid := (lo + hi) / 2
		if g.frequency[mid] < f {
			lo = mid
		} else {
			hi = mid
		}
	}
	copy(g.frequency[hi+1:g.count+1], g.frequency[hi:g.count])
	g.frequency[hi] = f
	g.count++
}

// search fills the margins of a loop gain on the grid.
func (m *Margins) search(l gain, g *scan) {
	for i := range g.count {
		g.gain[i] = l.Loop(g.frequency[i])
	}
	m.crossovers(l, g)
	m.phaseCrossings(l, g)
	m.modulus(l, g)
	m.bandwidth(l, g)
	m.Conditional = m.Stability == Stable && !math.IsNaN(m.GainReduction)
}

func (m *Margins) crossovers(l gain, g *scan) {
	m.Crossover, m.PhaseMargin = math.NaN(), math.NaN()
	above := cmplx.Abs(g.gain[0]) > 1
	m.Crossed = AlwaysBelow
	if above {
		m.Crossed = AlwaysAbove
	}
	for i := 1; i < g.count; i++ {
		now := cmplx.Abs(g.gain[i]) > 1
		if now == above {
			continue
		}
		above = now
		f := bisect(g.frequency[i-1], g.frequency[i], now, func(f float64) bool { return cmplx.Abs(l.Loop(f)) > 1 })
		c := Crossover{f, wrapDeg(180 + degrees(cmplx.Phase(l.Loop(f)))), !now}
		if m.CrossoverCount < MaxCrossovers {
			m.Crossovers[m.CrossoverCount] = c
		}
		m.CrossoverCount++
		if c.Falls {
			m.Crossover, m.Crossed = f, Crosses
		} else if m.Crossed != Crosses {
			m.Crossed = OnlyRises
		}
		if !(c.Margin >= m.PhaseMargin) {
			m.PhaseMargin = c.Margin
		}
	}
}

func (m *Margins) phaseCrossings(l gain, g *scan) {
	m.GainMargin, m.GainReduction = math.NaN(), math.NaN()
	for i := 1; i < g.count; i++ {
		a, b := g.gain[i-1], g.gain[i]
		if (imag(a) > 0) == (imag(b) > 0) || real(a) > 0 && real(b) > 0 || i == g.count-1 {
			continue
		}
		up := imag(b) > 0
		f := bisect(g.frequency[i-1], g.frequency[i], up, func(f float64) bool { return imag(l.Loop(f)) > 0 })
		if t := l.Loop(f); real(t) < 0 {
			m.addPhaseCrossing(f, t)
		}
	}
	// At half the decision rate the sampled gain is real: the locus of negative
	// frequencies meets it there.
	if t := g.gain[g.count-1]; real(t) < 0 && math.Abs(imag(t)) <= 1e-6*math.Abs(real(t)) {
		m.addPhaseCrossing(g.nyquist, t)
	}
}

func (m *Margins) addPhaseCrossing(f float64, t complex128) {
	db := -20 * math.Log10(cmplx.Abs(t))
	if m.PhaseCount < MaxPhaseCrossings {
		m.PhaseCrossings[m.PhaseCount] = PhaseCrossing{f, db}
	}
	m.PhaseCount++
	if db > 0 && !(db >= m.GainMargin) {
		m.GainMargin = db
	}
	if db <= 0 && !(-db >= m.GainReduction) {
		m.GainReduction = -db
	}
}

// modulus finds the least |1+T|: the least of the grid, refined by golden section
// between its neighbours.
func (m *Margins) modulus(l gain, g *scan) {
	best, at := math.Inf(1), 0
	for i := range g.count {
		if d := cmplx.Abs(1 + g.gain[i]); d < best {
			best, at = d, i
		}
	}
	m.Modulus, m.ModulusAt = best, g.frequency[at]
	lo, hi := g.frequency[max(0, at-1)], g.frequency[min(g.count-1, at+1)]
	const golden = 0.6180339887498949
	x1, x2 := hi-golden*(hi-lo), lo+golden*(hi-lo)
	y1, y2 := cmplx.Abs(1+l.Loop(x1)), cmplx.Abs(1+l.Loop(x2))
	for range refinements {
		if hi-lo <= 1e-5*hi {
			break
		}
		if y1 < y2 {
			hi, x2, y2 = x2, x1, y1
			x1 = hi - golden*(hi-lo)
			y1 = cmplx.Abs(1 + l.Loop(x1))
		} else {
			lo, x1, y1 = x1, x2, y2
			x2 = lo + golden*(hi-lo)
			y2 = cmplx.Abs(1 + l.Loop(x2))
		}
	}
	if y := min(y1, y2); y < m.Modulus {
		m.Modulus, m.ModulusAt = y, (lo+hi)/2
	}
}

func (m *Margins) bandwidth(l gain, g *scan) {
	m.Bandwidth = math.NaN()
	passes := func(t complex128) bool { return cmplx.Abs(t) > cmplx.Abs(1+t)*math.Sqrt2/2 }
	if passes(g.gain[g.count-1]) {
		return
	}
	for i := g.count - 1; i > 0; i-- {
		if passes(g.gain[i-1]) {
			m.Bandwidth = bisect(g.frequency[i-1], g.frequency[i], false, func(f float64) bool { return passes(l.Loop(f)) })
			return
		}
	}
}

// bisect returns where the condition changes between lo and hi; at hi it is atHi.
func bisect(lo, hi float64, atHi bool, condition func(f float64) bool) float64 {
	for range refinements {
		if hi-lo <= resolution*hi {
			break
		}
		mid := (lo + hi) / 2
		if condition(mid) == atHi {
			hi = mid
		} else {
			lo = mid
		}
	}
	return (lo + hi) / 2
}

func degrees(rad float64) float64 { return rad * 180 / math.Pi }

// wrapDeg brings an angle into (-180°, 180°].
func wrapDeg(a float64) float64 {
	a = math.Mod(a, 360)
	switch {
	case a > 180:
		return a - 360
	case a <= -180:
		return a + 360
	}
	return a
}
