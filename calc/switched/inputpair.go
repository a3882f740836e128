package switched

import "math"

// pair is two input banks, 1 and 2, at one node that takes the current J, of mean
// zero. With w the voltage of bank 1 over that of bank 2,
//
//	j1 = (r2 J − w)/(r1 + r2),  j2 = (r1 J + w)/(r1 + r2)
//	dw/dt = −λ w + κ J,  λ = (1/C1 + 1/C2)/(r1 + r2),  κ = (r2/C1 − r1/C2)/(r1 + r2)
//
// one relaxation, driven by what the circuit draws.
type pair struct {
	r1, r2, c1, c2 float64 // [ohm], [F]
	lambda, kappa  float64 // [1/s], [V/As]
}

func newPair(bank *[MaxBanks]Bank) pair {
	p := pair{r1: bank[0].ESR, r2: bank[1].ESR, c1: bank[0].C, c2: bank[1].C}
	per := 1 / (p.r1 + p.r2)
	p.lambda = (1/p.c1 + 1/p.c2) * per
	p.kappa = (p.r2/p.c1 - p.r1/p.c2) * per
	return p
}

// node returns the node's voltage, up to a constant, and its first and second
// derivatives, where the banks hold the charge q together and the current has the
// derivatives rate and bend.
func (p *pair) node(q, w, j, rate, bend float64) (v, slope, curve float64) {
	per := 1 / (p.r1 + p.r2)
	series := p.r1 * p.r2 * per
	v = (p.r2*(q+p.c2*w)+p.r1*(q-p.c1*w))/(p.c1+p.c2)*per + series*j
	rise := func(j, w float64) float64 { // of the banks' part, by the current and w there
		return (p.r2*(p.r2*j-w)/p.c1 + p.r1*(p.r1*j+w)/p.c2) * per * per
	}
	return v, rise(j, w) + series*rate, rise(rate, p.kappa*j-p.lambda*w) + series*bend
}

// draw is what one interval draws from the pair.
type draw struct {
	weight vec     // of the state in the current drawn
	mean   float64 // [A] J at the reference
	decay  float64 // e^(−λ t)
	held   float64 // [s] ∫ e^(−λ s) ds = (1 − e^(−λ t))/λ
	push   float64 // [V] what J adds to w over the interval
	drawn  bool    // a high side is on
}

// farFromRelaxation is how far, by the determinant over the product of its rows, A + λ
// must be from singular for the closed form to keep nine digits.
const farFromRelaxation = 1e-6

// leastOfPair is the share below which a bank's current, the difference of two that
// nearly agree, has lost too many digits.
const leastOfPair = 1e-2 // [1]

// sharePair is the closed form of shareInput for two banks. It reports false where that
// has to take over: where a phase rests while another draws, where a mode of the circuit
// relaxes as the banks do, where one bank carries next to nothing, and where the ripple's
// extreme may lie inside an interval.
//
// With ξ the state, dξ/dt = A ξ + b, and J = J0 − cᵀξ in an interval from 0 to t,
//
//	w(t) = e^(−λt) w(0) + κ [J0 (1 − e^(−λt))/λ − cᵀz]
//	(A + λ) z = ξ(t) − e^(−λt) ξ(0) − b (1 − e^(−λt))/λ,  z = ∫ e^(−λ(t−s)) ξ(s) ds
//	(A − λ) u = ξ(t) w(t) − ξ(0) w(0) − b ∫w − κ (J0 ∫ξ − ∫ξξᵀ c),  u = ∫ ξ w ds
//	λ ∫w = w(0) − w(t) + κ ∫J
//
// by integrating d(e^(λs) ξ), d(ξ w) and dw. Then <J w> gives all mean squares, since
// <w dw/dt> = 0 makes λ <w²> = κ <J w>.
func (s *Solver) sharePair(sol *Solution, bank *[MaxBanks]Bank, dst *InputSolution) bool {
	p := newPair(bank)
	var draws [maxIntervals]draw
	// w over the whole solved part is an affine function of w at its start.
	scale, offset := 1.0, 0.0
	for k := range s.count {
		d := &draws[k]
		if !s.draw(k, &p, sol.InputMean, d) {
			return false
		}
		scale *= d.decay
		offset = d.decay*offset + d.push
	}
	w, q, product := offset/(1-scale), 0.0, 0.0
	e := extent{math.Inf(1), math.Inf(-1)} // of the node at the edges
	all := e                               // that it cannot leave
	for k := range s.count {
		d, v := &draws[k], &s.iv[k]
		next := d.decay*w + d.push
		charge := d.mean * v.t
		if d.drawn {
			s.moments.set(s, k)
			charge -= dot(&d.weight, &s.moments.q, s.nw.n)
		}
		area := (w - next + p.kappa*charge) / p.lambda
		product += d.mean * area
		if d.drawn {
			u, ok := s.crossed(k, &p, d, w, next, area)
			if !ok {
				return false
			}
			product -= dot(&d.weight, &u, s.nw.n)
		}
		ends, inside, ok := s.spanPair(k, &p, d, q, w, charge, next)
		if !ok {
			return false
		}
		e.add(ends.least)
		e.add(ends.most)
		all.add(inside.least)
		all.add(inside.most)
		q += charge
		w = next
	}
	if all != e { // an extreme may lie inside an interval
		return false
	}
	period := 0.0
	for k := range s.count {
		period += s.iv[k].t
	}
	jw := product / period
	j2, w2 := dst.RMS*dst.RMS, p.kappa/p.lambda*jw
	per := 1 / (p.r1 + p.r2)
	dst.BankRMS[0] = per * math.Sqrt(max(0, p.r2*p.r2*j2-2*p.r2*jw+w2))
	dst.BankRMS[1] = per * math.Sqrt(max(0, p.r1*p.r1*j2+2*p.r1*jw+w2))
	dst.RipplePP = e.most - e.least
	return min(dst.BankRMS[0], dst.BankRMS[1]) >= leastOfPair*dst.RMS
}

// draw computes what interval k does to w.
func (s *Solver) draw(k int, p *pair, mean float64, d *draw) bool {
	nw, v := &s.nw, &s.iv[k]
	*d = draw{mean: mean, decay: math.Exp(-p.lambda * v.t), held: -math.Expm1(-p.lambda*v.t) / p.lambda}
	rests := false
	for j := range nw.phases {
		switch v.top.pos[j] {
		case high:
			d.drawn = true
			d.weight[j] = 1
			d.mean -= s.ref.i[j]
		case resting:
			rests = true
		}
	}
	d.push = p.kappa * d.mean * d.held
	if !d.drawn {
		return true
	}
	if rests {
		return false
	}
	var z vec
	for i := range nw.n {
		z[i] = v.stop[i] - d.decay*v.start[i] - v.top.b[i]*d.held
	}
	if !s.shifted(k, p.lambda, &z) {
		return false
	}
	d.push -= p.kappa * dot(&d.weight, &z, nw.n)
	return true
}

// crossed returns u of sharePair, after moments.set.
func (s *Solver) crossed(k int, p *pair, d *draw, w, next, area float64) (u vec, ok bool) {
	n, v, m := s.nw.n, &s.iv[k], &s.moments
	for i := range n {
		square := 0.0
		for j, x := range m.x[i*n : i*n+n] {
			square += x * d.weight[j]
		}
		u[i] = v.stop[i]*next - v.start[i]*w - v.top.b[i]*area - p.kappa*(d.mean*m.q[i]-square)
	}
	return u, s.shifted(k, -p.lambda, &u)
}

// shifted replaces x by the solution of (A + λ) y = x with the matrix A of interval k.
// It reports false near a singular one.
func (s *Solver) shifted(k int, lambda float64, x *vec) bool {
	n, a := s.nw.n, &s.total
	s.iv[k].top.matrix(&s.nw, 1, a)
	rows, det := 1.0, 1.0
	for i := range n {
		a[i*n+i] += lambda
		row := 0.0
		for _, y := range a[i*n : i*n+n] {
			row += y * y
		}
		rows *= math.Sqrt(row)
	}
	if !solve(a, &s.pivot, x, n) {
		return false
	}
	for i := range n {
		det *= a[i*n+i]
	}
	return math.Abs(det) > farFromRelaxation*rows
}

// spanPair returns the node's voltage at both ends of interval k, and a range that it
// does not leave inside; ok is false if no such range is known.
//
// Within an interval the voltage is the slow course of the circuit plus one relaxation,
// so its slope has at most one extreme. Then it lies below its tangents where it is
// concave; where its slope passes through a least value, that lies above the tangents
// of the slope.
func (s *Solver) spanPair(k int, p *pair, d *draw, q, w, charge, next float64) (ends, inside extent, ok bool) {
	v := &s.iv[k]
	v0, slope0, curve0 := s.nodeOfPair(k, p, d, q, w, &v.start)
	v1, slope1, curve1 := s.nodeOfPair(k, p, d, q+charge, next, &v.stop)
	ends = between(v0, v1)
	if slope0 < 0 || slope0 == 0 && slope1 < 0 {
		inside, ok = withinTangents(v.t, -v0, -v1, -slope0, -slope1, -curve0, -curve1)
		return ends, extent{-inside.most, -inside.least}, ok
	}
	inside, ok = withinTangents(v.t, v0, v1, slope0, slope1, curve0, curve1)
	return ends, inside, ok
}

// withinTangents bounds a function over t by its values and first and second
// derivatives at both ends, where it sets out upwards.
func withinTangents(t, v0, v1, slope0, slope1, curve0, curve1 float64) (inside extent, ok bool) {
	inside = between(v0, v1)
	switch {
	case slope1 < 0: // over a summit
		at := (v1 - v0 - slope1*t) / (slope0 - slope1)
		inside.add(v0 + slope0*at)
		return inside, curve0 <= 0 && curve1 <= 0
	case curve0 < 0 && curve1 > 0: // the slope dips
		at := (slope1 - slope0 - curve1*t) / (curve0 - curve1)
		if least := slope0 + curve0*at; least < 0 {
			inside.add(v0 + least*t)
			inside.add(v1 - least*t)
		}
	}
	return inside, true
}

// nodeOfPair is pair.node at a state of interval k.
func (s *Solver) nodeOfPair(k int, p *pair, d *draw, q, w float64, x *vec) (v, slope, curve float64) {
	if !d.drawn {
		return p.node(q, w, d.mean, 0, 0)
	}
	nw, top := &s.nw, &s.iv[k].top
	var rate, bend vec
	top.slope(nw, x, &rate)
	top.slope(nw, &rate, &bend)
	return p.node(q, w, d.mean-dot(&d.weight, x, nw.n), -dot(&d.weight, &rate, nw.n), dot(&d.weight, &top.b, nw.n)-dot(&d.weight, &bend, nw.n))
}
