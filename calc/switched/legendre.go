package switched

import "math"

// legendre[k][j] is the weight of the Legendre polynomial P_j in x^k,
//
//	x^k = Σ_j (2j+1) k! / (2^((k−j)/2) ((k−j)/2)! (k+j+1)!!) P_j(x),  k − j even
//
// (Abramowitz & Stegun, Handbook of Mathematical Functions, 1964, table 22.9 for
// k ≤ 12; remembered form, checked by the test that resums the series.)
//
// Legendre polynomials are orthogonal, so the mean over an interval of the
// product of two functions is Σ_j a_j b_j/(2j+1) without any cross terms.
var legendre = func() (w [maxTerms + 1][maxTerms + 1]float64) {
	// x P_j = ((j+1) P_{j+1} + j P_{j−1})/(2j+1)
	w[0][0] = 1
	for k := range maxTerms {
		for j := 0; j <= k; j++ {
			q := w[k][j] / float64(2*j+1)
			w[k+1][j+1] += q * float64(j+1)
			if j > 0 {
				w[k+1][j-1] += q * float64(j)
			}
		}
	}
	return w
}()

// cell is a stretch of time short enough for a Taylor series about its middle:
// the deviation there is Σ_k c_k x^k for x from −1 to 1.
type cell struct {
	h      float64 // length
	order  int     // greatest k
	c      [maxTerms + 1]vec
	series [maxTerms + 1]float64 // of the quantity in question
}

// set expands the state that starts at x with rate y over rung l of the ladder.
func (ce *cell) set(ld *ladder, l int, x, y *vec, n int) {
	ce.h = ld.h[l]
	half := 0.5 * ce.h
	ce.order = min(terms(ld.norm*half)+2, maxTerms)
	middle, rate := &ce.c[0], &ce.c[1]
	scale := math.Ldexp(1, l-1) // half over the first rung
	if l > 0 {
		ld.step(l-1, x, middle, n)
		ld.stepRate(l-1, y, rate, n)
	} else {
		ce.crawl(ld, x, y, n)
	}
	for i := range n {
		rate[i] *= half
	}
	if n == 4 {
		ce.series4((*[16]float64)(ld.a[:]), scale)
		return
	}
	for k := 2; k <= ce.order; k++ {
		c := &ce.c[k]
		apply(&ld.a, &ce.c[k-1], c, n)
		q := scale * inverse[k]
		for i := range n {
			c[i] *= q
		}
	}
}

// series4 is the recursion of set for four states.
func (ce *cell) series4(m *[16]float64, scale float64) {
	x, y, z, w := ce.c[1][0], ce.c[1][1], ce.c[1][2], ce.c[1][3]
	for k := 2; k <= ce.order; k++ {
		q := scale * inverse[k]
		x, y, z, w = q*x, q*y, q*z, q*w
		x, y, z, w = m[0]*x+m[1]*y+m[2]*z+m[3]*w, m[4]*x+m[5]*y+m[6]*z+m[7]*w,
			m[8]*x+m[9]*y+m[10]*z+m[11]*w, m[12]*x+m[13]*y+m[14]*z+m[15]*w
		c := (*[4]float64)(ce.c[k][:])
		c[0], c[1], c[2], c[3] = x, y, z, w
	}
}

// crawl goes half of the first rung by its Taylor series.
func (ce *cell) crawl(ld *ladder, x, y *vec, n int) {
	var moved, term, next vec
	for i := range n {
		term[i] = 0.5 * ld.h[0] * y[i]
		moved[i] = term[i]
	}
	for k := 2; k <= ce.order; k++ {
		apply(&ld.a, &term, &next, n)
		q := 0.5 * inverse[k]
		for i := range n {
			term[i] = next[i] * q
			moved[i] += term[i]
		}
	}
	apply(&ld.a, &moved, &next, n)
	for i := range n {
		ce.c[0][i] = x[i] + moved[i]
		ce.c[1][i] = y[i] + next[i]/ld.h[0]
	}
}

// pick forms the series of a watched quantity.
func (ce *cell) pick(wt *watch, n int) {
	for k := 0; k <= ce.order; k++ {
		ce.series[k] = wt.of(&ce.c[k], n)
	}
}

// value and rate evaluate the series and its derivative at x.
func (ce *cell) value(x float64) float64 {
	acc := 0.0
	for k := ce.order; k >= 0; k-- {
		acc = acc*x + ce.series[k]
	}
	return acc
}

func (ce *cell) rate(x float64) float64 {
	acc := 0.0
	for k := ce.order; k >= 1; k-- {
		acc = acc*x + float64(k)*ce.series[k]
	}
	return acc
}

const cellParts = 4

// extremes widens e by the extremes of the series inside the cell.
func (ce *cell) extremes(e *extent) {
	rest := 0.0
	for k := 2; k <= ce.order; k++ {
		rest += float64(k) * math.Abs(ce.series[k])
	}
	if math.Abs(ce.series[1]) > rest {
		return // the rate keeps its sign
	}
	x0 := -1.0
	r0 := ce.rate(x0)
	for i := 1; i <= cellParts; i++ {
		x1 := -1 + 2.0/cellParts*float64(i)
		r1 := ce.rate(x1)
		if (r0 < 0) != (r1 < 0) {
			e.add(ce.value(ce.stationary(x0, x1, r0)))
		}
		x0, r0 = x1, r1
	}
}

// stationary finds the zero of the derivative between a and b, where it has
// opposite signs; ra is its value at a. Regula falsi with halved weights: the
// extreme itself feels the error of its place only in second order.
func (ce *cell) stationary(a, b, ra float64) float64 {
	rb := ce.rate(b)
	x := a
	for range 40 {
		x = b - rb*(b-a)/(rb-ra)
		if !(x >= -1 && x <= 1) {
			x = 0.5 * (a + b)
		}
		r := ce.rate(x)
		if r == 0 {
			break
		}
		if (r < 0) != (rb < 0) {
			a, ra = b, rb
		} else {
			ra *= 0.5
		}
		if b-x < 1e-12 && x-b < 1e-12 {
			break
		}
		b, rb = x, r
	}
	return x
}

// extent is a greatest and a least value.
type extent struct{ least, most float64 }

func between(a, b float64) extent {
	if a < b {
		return extent{a, b}
	}
	return extent{b, a}
}

// greater is max without its care for signed zeros.
func greater(a, b float64) float64 {
	if a > b {
		return a
	}
	return b
}

func (e *extent) add(v float64) {
	if v < e.least {
		e.least = v
	}
	if v > e.most {
		e.most = v
	}
}
