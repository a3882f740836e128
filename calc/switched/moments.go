package switched

// moments are the integrals over one interval of the deviation ξ, of its
// products and of the products of its rates y = dξ/dt:
//
//	Q = ∫ξ dτ,  X = ∫ξ ξᵀ dτ,  Y = ∫y yᵀ dτ
//
// Over the first cell they follow exactly from the Taylor series in Legendre
// form. Each doubling then adds the second half, in which ξ(h+τ) = E ξ(τ) + d:
//
//	Q → Q + E Q + h d
//	X → X + E X Eᵀ + (E Q) dᵀ + d (E Q)ᵀ + h d dᵀ
//	Y → Y + E Y Eᵀ
type moments struct {
	q, y0   vec
	x, y    square
	scratch [2]square
	l       [momentOrder + 1]vec
}

// momentOrder is how far the Legendre series goes in products. Within a cell,
// |A| h/2 ≤ 1/4, coefficient j is below 4^−j/(1·3·5···(2j−1)) of the first, and
// enters squared: what is left out is below 1e-16.
const momentOrder = 5

// rates computes Y over interval k.
func (m *moments) rates(s *Solver, k int) {
	n := s.nw.n
	ld := s.rungs(k)
	ce := &s.work
	s.iv[k].top.slope(&s.nw, &s.iv[k].start, &m.y0)
	ce.set(ld, ld.cell, &s.iv[k].start, &m.y0, n)
	m.project(ce, 1, 2/ce.h, n)
	m.products(ce.h, &m.y, n)
	for l := ld.cell; l < ld.levels; l++ {
		congruent(m.exponential(ld, l, n), &m.y, &m.scratch[1], n)
	}
}

// set computes all three.
func (m *moments) set(s *Solver, k int) {
	m.rates(s, k)
	n := s.nw.n
	ld := s.rungs(k)
	ce := &s.work
	m.project(ce, 0, 1, n)
	m.products(ce.h, &m.x, n)
	for i := range n {
		m.q[i] = m.l[0][i] * ce.h
	}
	for l := ld.cell; l < ld.levels; l++ {
		e := m.exponential(ld, l, n)
		h, d := ld.h[l], &ld.d[l]
		var eq vec
		apply(e, &m.q, &eq, n)
		congruent(e, &m.x, &m.scratch[1], n)
		for i := range n {
			for j := range n {
				m.x[i*n+j] += eq[i]*d[j] + d[i]*eq[j] + h*d[i]*d[j]
			}
			m.q[i] += eq[i] + h*d[i]
		}
	}
}

// exponential returns E = I + F of a rung.
func (m *moments) exponential(ld *ladder, l, n int) *square {
	e := &m.scratch[0]
	copy(e[:n*n], ld.f[l][:n*n])
	for i := range n {
		e[i*n+i]++
	}
	return e
}

// project fills the Legendre coefficients of the series, or of its derivative
// with respect to x times scale.
func (m *moments) project(ce *cell, derivative int, scale float64, n int) {
	for j := 0; j <= momentOrder; j++ {
		l := m.l[j][:n]
		for i := range l {
			l[i] = 0
		}
		for k := j; k+derivative <= ce.order; k += 2 {
			w := legendre[k][j] * scale
			if derivative == 1 {
				w *= float64(k + 1)
			}
			for i, c := range ce.c[k+derivative][:n] {
				l[i] += w * c
			}
		}
	}
}

// products writes the integral over h of the products of the projected series.
func (m *moments) products(h float64, dst *square, n int) {
	for i := range n {
		for l := 0; l <= i; l++ {
			acc := 0.0
			for j := momentOrder; j >= 0; j-- {
				acc += m.l[j][i] * m.l[j][l] * inverse[2*j+1]
			}
			dst[i*n+l] = acc * h
			dst[l*n+i] = dst[i*n+l]
		}
	}
}
