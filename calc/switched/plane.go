package switched

const (
	planeShort      = 8    // order of the series about the middle for |A| t/2 ≤ planeShortReach; remainder 0.08^8/9!
	planeShortReach = 0.08 // |A| t/2
	planeOrder      = 18   // the same for planeReach; remainder 1/19!
	planeReach      = 1.0
)

// plane is one interval of the circuit with one phase and one bank, a system in
// the plane: deviation ι of the current, ν of the bank voltage. With h half of
// the interval's length, X = A h and
//
//	A = | −(R+αr)/L  −α/L  |     r = ESR, α = 1/(1 + r G)
//	    |  α/C       −αG/C |
//
// everything is told from the middle of the interval and σ, the mean of the
// states at both its ends. With e = X σ + b h (b the rate at the reference)
//
//	end − start = 2 T e,  T = tanh(X)/X
//	rate in the middle times h: w = e / cosh X
//	state in the middle: σ − X (cosh X − 1)/X² w
//
// These are even functions of X, hence a_0 + a_1 P with P = X² by Cayley and
// Hamilton: the closed form for 2x2. For |X| ≤ 1 their series are shorter than
// exp, sin and sinh, free of cancellation, and indifferent to whether the
// eigenvalues are real, equal or complex; beyond, the general solver takes over.
type plane struct {
	h                  float64 // [s] half of the length
	x11, x12, x21, x22 float64 // X
	p11, p12, p21, p22 float64 // P
	bi, bv             float64 // h times the rate at the reference
	order              int
	tr, det            float64 // of X
	tr2, det2          float64 // of P
	s, k, t, inv, cosh even    // sinh X/X, (cosh X − 1)/P, tanh X/X, 1/cosh X, cosh X
	sc, ss             even    // S cosh X, S², where displacements from the start are needed
	i0, v0             float64 // state at the start
	i1, v1             float64 // at the end
	ci, cv             taylor
}

// even is an even function of X: a + b X².
type even struct{ a, b float64 }

func (pl *plane) times(f, g even) even {
	bb := f.b * g.b
	return even{f.a*g.a - bb*pl.det2, f.a*g.b + f.b*g.a + bb*pl.tr2}
}

// on applies the function to a vector.
func (f even) on(pl *plane, i, v float64) (float64, float64) {
	return f.a*i + f.b*(pl.p11*i+pl.p12*v), f.a*v + f.b*(pl.p21*i+pl.p22*v)
}

// set prepares the interval of length t, path resistance r and driving voltage
// u at the reference, where the bank takes the current extra.
func (pl *plane) set(ob *oneBank, t, r, u, extra float64) bool {
	h := 0.5 * t
	hl := h * ob.invL
	pl.h = h
	pl.x11 = -(r + ob.rho) * hl
	pl.x12 = -ob.alpha * hl
	pl.x21 = ob.inject * h
	pl.x22 = -ob.conductance * pl.x21
	pl.bi = u * hl
	pl.bv = extra * pl.x21
	cross := pl.x12 * pl.x21
	tr := pl.x11 + pl.x22
	det := pl.x11*pl.x22 - cross
	size := tr*tr - cross
	switch {
	case size <= planeShortReach*planeShortReach:
		pl.order = planeShort
	case size <= planeReach*planeReach:
		pl.order = planeOrder
	default:
		return false
	}
	pl.p11 = pl.x11*pl.x11 + cross
	pl.p12 = tr * pl.x12
	pl.p21 = tr * pl.x21
	pl.p22 = pl.x22*pl.x22 + cross
	tr2 := pl.p11 + pl.p22
	det2 := det * det
	pl.tr, pl.det, pl.tr2, pl.det2 = tr, det, tr2, det2
	// P^n = u_n P − det2 u_{n−1} with u_1 = 1, u_{n+1} = tr2 u_n − det2 u_{n−1}
	u3 := tr2*tr2 - det2
	pl.s = even{1 - det2*(1./120+tr2*(1./5040)), 1./6 + tr2*(1./120) + u3*(1./5040)}
	pl.k = even{1./2 - det2*(1./720+tr2*(1./40320)), 1./24 + tr2*(1./720) + u3*(1./40320)}
	if pl.order > planeShort {
		pl.long(u3)
	}
	// cosh X = 1 + P k
	pl.cosh = even{1 - pl.k.b*det2, pl.k.a + pl.k.b*tr2}
	c := &pl.cosh
	q := 1 / (c.a*(c.a+c.b*tr2) + c.b*c.b*det2)
	pl.inv = even{(c.a + c.b*tr2) * q, -c.b * q}
	pl.t = pl.times(pl.s, pl.inv)
	return true
}

// long adds the terms from P^4 on.
func (pl *plane) long(u3 float64) {
	before, u := u3, pl.tr2*u3-pl.det2*pl.tr2
	f := 1. / 5040 // 1/(2n+1)!
	for n := 4; n <= planeOrder/2; n++ {
		f *= inverse[2*n] * inverse[2*n+1]
		g := f * inverse[2*n+2]
		pl.s.a -= pl.det2 * before * f
		pl.s.b += u * f
		pl.k.a -= pl.det2 * before * g
		pl.k.b += u * g
		before, u = u, pl.tr2*u-pl.det2*before
	}
}

// span sets the states at both ends and the series about the middle from the
// mean of the states at the ends.
func (pl *plane) span(i, v float64) {
	ei, ev := pl.x11*i+pl.x12*v+pl.bi, pl.x21*i+pl.x22*v+pl.bv
	ti, tv := pl.t.on(pl, ei, ev)
	pl.i0, pl.v0, pl.i1, pl.v1 = i-ti, v-tv, i+ti, v+tv
	wi, wv := pl.inv.on(pl, ei, ev)
	ki, kv := pl.k.on(pl, wi, wv)
	ci, cv := &pl.ci, &pl.cv
	ci[0], cv[0] = i-(pl.x11*ki+pl.x12*kv), v-(pl.x21*ki+pl.x22*kv)
	ci[1], cv[1] = wi, wv
	oi, ov := wi, wv
	ei, ev = 0.5*(pl.x11*wi+pl.x12*wv), 0.5*(pl.x21*wi+pl.x22*wv)
	ci[2], cv[2] = ei, ev
	oi, ov = pl.next(oi, ov, 1./6)
	ei, ev = pl.next(ei, ev, 1./12)
	ci[3], cv[3] = oi, ov
	ci[4], cv[4] = ei, ev
	oi, ov = pl.next(oi, ov, 1./20)
	ei, ev = pl.next(ei, ev, 1./30)
	ci[5], cv[5] = oi, ov
	ci[6], cv[6] = ei, ev
	oi, ov = pl.next(oi, ov, 1./42)
	ei, ev = pl.next(ei, ev, 1./56)
	ci[7], cv[7] = oi, ov
	ci[8], cv[8] = ei, ev
	for k := planeShort + 1; k < pl.order; k += 2 {
		oi, ov = pl.next(oi, ov, inverse[k]*inverse[k-1])
		ei, ev = pl.next(ei, ev, inverse[k]*inverse[k+1])
		ci[k], cv[k] = oi, ov
		ci[k+1], cv[k+1] = ei, ev
	}
}

// next returns q P (i, v).
func (pl *plane) next(i, v, q float64) (float64, float64) {
	return (pl.p11*i + pl.p12*v) * q, (pl.p21*i + pl.p22*v) * q
}

// turn returns T X = tanh X, by P X = tr P − det X.
func (pl *plane) turn() (m11, m12, m21, m22 float64) {
	a, b := pl.t.a-pl.t.b*pl.det, pl.t.b*pl.tr
	return a*pl.x11 + b*pl.p11, a*pl.x12 + b*pl.p12, a*pl.x21 + b*pl.p21, a*pl.x22 + b*pl.p22
}
