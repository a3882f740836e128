package switched

import "math"

const maxPasses = 40

// rest is the third interval of discontinuous conduction: no current in the
// inductor, the bank alone feeds the load, ν decays by
//
//	dν/dt = (α/C)(−I_0 − G v),   time constant C/(α G)
type rest struct {
	z        float64 // −(α G/C) t_3
	start    float64 // ν as it begins
	change   float64 // of ν
	mean     float64 // of ν
	variance float64 // of ν
	square   float64 // mean square of the bank current
}

// phi1 and phi2 are (e^z − 1)/z and (e^z − 1 − z)/z², spreading is the variance
// of e^{zx}/z over 0 < x < 1, (φ1(2z) − φ1(z)²)/z²; by their series where the
// closed form cancels: Σ z^n/(n+1)!, Σ z^n/(n+2)!, Σ_{n≥2} (2^n (n−2) + 2)/(n+2)! z^(n−2).
func phi1(z float64) float64 {
	if z > 0.1 || z < -0.1 {
		return math.Expm1(z) / z
	}
	return 1 + z*(1./2+z*(1./6+z*(1./24+z*(1./120+z*(1./720+z*(1./5040+z*(1./40320+z/362880)))))))
}

func phi2(z float64) float64 {
	if z > 0.1 || z < -0.1 {
		return (math.Expm1(z)/z - 1) / z
	}
	return 1./2 + z*(1./6+z*(1./24+z*(1./120+z*(1./720+z*(1./5040+z*(1./40320+z*(1./362880+z/3628800)))))))
}

func spreading(z float64) float64 {
	if z > 0.1 || z < -0.1 {
		one := phi1(z)
		return (phi1(2*z) - one*one) / (z * z)
	}
	return 2./24 + z*(10./120+z*(34./720+z*(98./5040+z*(258./40320+z*(642./362880+z*(1538./3628800+z*(3586./39916800)))))))
}

// advance returns by how much the state is displaced over the whole interval
// when h times its rate at the start is (i, v):
//
//	2 φ1(2X) = 2 (S cosh X + S² X),  S = sinh X/X
func (pl *plane) advance(i, v float64) (float64, float64) {
	ai, av := pl.sc.on(pl, i, v)
	i, v = pl.x11*i+pl.x12*v, pl.x21*i+pl.x22*v
	bi, bv := pl.ss.on(pl, i, v)
	return 2 * (ai + bi), 2 * (av + bv)
}

// resting finds the state that is periodic when the high side is on for t1, the
// rectifier conducts for t2, and what current is left then is dropped. The
// reference is the output v with no inductor current, so the bank has a rate of
// its own there.
//
// All displacements are linear in ν at turn-on; their sum is to vanish.
func (ob *oneBank) resting(c *Circuit, t1, t2, v float64) bool {
	leg := &c.Leg
	g := ob.conductance
	ob.v, ob.i = v, 0
	ob.extra = -c.load(v)
	ob.node = v + ob.rho*ob.extra
	ob.t1, ob.t2, ob.t3 = t1, t2, c.Period-t1-t2
	ob.duty = t1 / c.Period
	r1, r2 := leg.Winding+leg.HighSide, leg.Winding+leg.Rectifier.Slope
	u2 := -leg.Rectifier.Threshold - ob.node
	a, b := &ob.on, &ob.off
	if !a.set(ob, t1, r1, c.Vin-ob.node, ob.extra) || !b.set(ob, t2, r2, u2, ob.extra) {
		return false
	}
	a.sc, a.ss = a.times(a.s, a.cosh), a.times(a.s, a.s)
	b.sc, b.ss = b.times(b.s, b.cosh), b.times(b.s, b.s)
	ai, av := a.advance(a.bi, a.bv)
	li, lv := a.advance(a.x12, a.x22)
	bi, bv := b.advance(b.x11*ai+b.x12*av+b.bi, b.x21*ai+b.x22*av+b.bv)
	mi, mv := b.advance(b.x11*li+b.x12*(lv+1), b.x21*li+b.x22*(lv+1))
	z := -ob.inject * g * ob.t3
	fed := ob.inject * ob.t3 * phi1(z)
	keep := 1 - fed*g
	lin := (lv+mv)*keep - fed*g
	nu := -((av+bv)*keep + fed*ob.extra) / lin
	ai, av = ai+li*nu, av+lv*nu
	bi, bv = bi+mi*nu, bv+mv*nu
	a.span(0.5*ai, nu+0.5*av)
	b.span(ai+0.5*bi, nu+av+0.5*bv)
	ob.rest.z = z
	ob.rest.start = b.v1
	ob.rest.change = fed * (ob.extra - g*b.v1)

	// How the end of conduction and, by the shift of ν, the mean output move.
	ob.left = b.i1
	ob.fall = (u2 - ob.alpha*b.v1 - (ob.rho+r2)*b.i1) * ob.invL
	yi := (c.Vin - ob.node - ob.alpha*a.v1 - (ob.rho+r1)*a.i1) * ob.invL
	yv := ob.inject * (a.i1 + ob.extra - g*a.v1)
	ei, ev := b.advance(b.x11*yi+b.x12*yv, b.x21*yi+b.x22*yv)
	ob.gain = -((yv+ev)*keep - ob.inject*(ob.extra-g*(b.v1+ob.rest.change))) / lin
	ob.push = yi + ei + (li+mi)*ob.gain
	return ob.t3 > 0 && ob.fall < 0 && nu < math.MaxFloat64 && nu > -math.MaxFloat64
}

// meanOfRest fills the integrals over the rest and returns the mean deviation of
// the node over the whole period.
func (ob *oneBank) meanOfRest(c *Circuit) float64 {
	r := &ob.rest
	rate := ob.inject * (ob.extra - ob.conductance*r.start) * ob.t3
	r.mean = r.start + rate*phi2(r.z)
	perT := 1 / c.Period
	on, off := &ob.on, &ob.off
	w1, w2, w3 := ob.t1*perT, ob.t2*perT, ob.t3*perT
	return w1*(ob.alpha*on.cv.mean(on.order)+ob.rho*on.ci.mean(on.order)) +
		w2*(ob.alpha*off.cv.mean(off.order)+ob.rho*off.ci.mean(off.order)) + w3*ob.alpha*r.mean +
		(ob.node - ob.v)
}

// firstRest returns on-time and conduction time with constant output v and the
// resistances' drops at half the peak current:
//
//	I T = I_pk (t_1 + t_2)/2,  t_1 = L I_pk/u_1,  t_2 = L I_pk/u_2
func (c *Circuit) firstRest(v float64) (t1, t2 float64) {
	leg := &c.Leg
	u1, u2 := c.Vin-v, v+leg.Rectifier.Threshold
	i := c.load(v) / float64(c.Phases)
	charge := 2 * i * c.Period / leg.L
	peak := 0.0
	for range 2 {
		d1, d2 := u1-0.5*peak*(leg.HighSide+leg.Winding), u2+0.5*peak*(leg.Rectifier.Slope+leg.Winding)
		peak = math.Sqrt(charge * d1 * d2 / (d1 + d2))
		t1, t2 = leg.L*peak/d1, leg.L*peak/d2
	}
	return t1, t2
}

// fixedResting solves in discontinuous conduction at a duty ratio. Each pass
// moves the end of conduction to the zero of the current by Newton's step; what
// a wrong end drops is of second order, so the passes converge quadratically.
func (ob *oneBank) fixedResting(c *Circuit, duty float64, sol *Solution) bool {
	t1 := duty * c.Period
	v := c.restingOutput(0, duty)
	vf := c.Leg.Rectifier.Threshold
	t2 := t1 * (c.Vin - v) / (v + vf)
	if most := c.Period - t1; !(t2 < most) {
		t2 = 0.99 * most
	}
	for n := range maxPasses {
		if !(t2 > 0) || !ob.resting(c, t1, t2, v) {
			return false
		}
		dt := -ob.left / ob.fall
		v += ob.on.v0
		if math.Abs(dt) <= zeroCurrent*t2 && math.Abs(ob.on.v0) <= 0.1*math.Abs(v) {
			return ob.reportResting(c, sol, n+1)
		}
		t2 += dt
	}
	return false
}

// regulatedResting solves in discontinuous conduction for the on-time that makes
// the mean output vout, starting from t1 and t2. On-time and end of conduction
// take Newton's step together: the exact linear response of the periodic state
// to the on-time stands for that of the mean, the secant improves on it.
func (ob *oneBank) regulatedResting(c *Circuit, vout, least, greatest, t1, t2 float64, sol *Solution) bool {
	var was, before, slope float64
	for n := range maxPasses {
		if !(t1 > least*c.Period && t1 < greatest*c.Period && t2 > 0) || !ob.resting(c, t1, t2, vout) {
			return false
		}
		e := ob.meanOfRest(c)
		slope = ob.gain
		if n > 0 && t1 != was {
			if q := (e - before) / (t1 - was); q > 0.5*slope && q < 2*slope {
				slope = q
			}
		}
		d1 := -e / slope
		d2 := -(ob.left + ob.push*d1) / ob.fall
		if math.Abs(d1) <= dutyAccuracy*t1 && math.Abs(d2) <= zeroCurrent*t2 {
			return ob.reportResting(c, sol, n+1)
		}
		was, before = t1, e
		t1 += d1
		t2 += d2
	}
	return false
}

// reportResting writes the figures of the state in discontinuous conduction. It
// reports false if the current does not stay above zero as it must.
func (ob *oneBank) reportResting(c *Circuit, sol *Solution, passes int) bool {
	ob.meanOfRest(c)
	r := &ob.rest
	rate := ob.inject * (ob.extra - ob.conductance*r.start)
	j := rate * c.Bank[0].C
	r.square = j * j * phi1(2*r.z)
	r.variance = 0
	if ob.conductance != 0 {
		r.variance = rate * rate * ob.t3 * ob.t3 * spreading(r.z)
	}
	ob.report(c, sol)
	sol.Leg.Mode = Discontinuous
	sol.Iterations = passes
	return sol.Leg.Valley >= -1e-9*sol.Leg.Peak && r.start+r.change+ob.v > -c.Leg.Rectifier.Threshold
}
