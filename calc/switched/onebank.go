package switched

import "math"

const (
	maxDuty      = 12 // corrections of the duty ratio
	dutyAccuracy = 1e-13
)

// oneBank solves a single phase with a single bank.
type oneBank struct {
	invL, inject, alpha, rho float64
	conductance              float64
	v, i                     float64 // reference: output and inductor current
	extra, node              float64 // there: current left for the bank, node voltage
	duty, t1, t2, t3         float64
	on, off                  plane
	rest                     rest
	left, fall               float64 // [A, A/s] current and its rate at the end of conduction
	gain, push               float64 // [V/s, A/s] what on-time does to ν at turn-on, to left
	mix                      taylor
}

// takes reports whether the circuit is of this kind.
func (ob *oneBank) takes(c *Circuit) bool { return c.Phases == 1 && c.Banks == 1 && c.Legs == nil }

func (ob *oneBank) set(c *Circuit) {
	r := c.Bank[0].ESR
	ob.alpha = 1
	ob.conductance = c.Conductance
	if c.Conductance != 0 {
		ob.alpha = 1 / (1 + r*c.Conductance)
	}
	ob.rho = ob.alpha * r
	ob.invL = 1 / c.Leg.L
	ob.inject = ob.alpha / c.Bank[0].C
}

// continuous finds the periodic state at the duty ratio with the rectifier
// conducting through the whole off-time. The reference is the output v with its
// load current through the inductor; the bank is at rest there, so only the
// current has a rate.
//
// Both intervals share σ, the mean of the states at the two edges, and what one
// adds the other takes back:
//
//	T_1 (X_1 σ + b_1 h_1) + T_2 (X_2 σ + b_2 h_2) = 0
//
// a 2x2 system whose determinant is of the order (ωT)² in numbers of the order
// ωT: no cancellation.
func (ob *oneBank) continuous(c *Circuit, duty, v float64) bool {
	leg := &c.Leg
	i := c.load(v)
	ob.v, ob.i, ob.duty = v, i, duty
	ob.extra, ob.node = 0, v
	ob.t1 = duty * c.Period
	ob.t2 = (1 - duty) * c.Period
	ob.t3 = 0
	r1, r2 := leg.Winding+leg.HighSide, leg.Winding+leg.Rectifier.Slope
	if !ob.on.set(ob, ob.t1, r1, c.Vin-v-r1*i, 0) || !ob.off.set(ob, ob.t2, r2, -leg.Rectifier.Threshold-v-r2*i, 0) {
		return false
	}
	a, b := &ob.on, &ob.off
	// T X = (t_a − t_b det) X + t_b tr P
	m11, m12, m21, m22 := a.turn()
	n11, n12, n21, n22 := b.turn()
	m11, m12, m21, m22 = m11+n11, m12+n12, m21+n21, m22+n22
	d1 := a.bi*(a.t.a+a.t.b*a.p11) + b.bi*(b.t.a+b.t.b*b.p11)
	d2 := a.bi*(a.t.b*a.p21) + b.bi*(b.t.b*b.p21)
	q := 1 / (m11*m22 - m12*m21)
	i, v = (m12*d2-m22*d1)*q, (m21*d1-m11*d2)*q
	a.span(i, v)
	b.span(i, v)
	return true
}

// fixed solves at a duty ratio. It reports false when the general solver is
// needed.
func (ob *oneBank) fixed(c *Circuit, duty float64, sol *Solution) bool {
	ob.set(c)
	if !ob.continuous(c, duty, c.averagedOutput(duty)) {
		return false
	}
	if c.Leg.Rectifier.Blocks && ob.i+ob.off.i1 < 0 {
		return ob.fixedResting(c, duty, sol)
	}
	ob.report(c, sol)
	sol.Iterations = 1
	return true
}

// voltSeconds is the balance of the inductor's volt-seconds over a period in
// continuous conduction, exact for one phase:
//
//	D (Vin + V_F) = V + V_F + I (R_w + R_r) + (R_hs − R_r) q/T,   I = I_0 + G V
//
// with q the charge through the high side.
type voltSeconds struct {
	base, excess, inv float64 // V + V_F + I (R_w + R_r), R_hs − R_r, 1/(Vin + V_F)
	load, slope       float64 // I, and how much of a change of q/T a change of D brings
}

func (c *Circuit) voltSeconds(vout float64) voltSeconds {
	leg := &c.Leg
	i, vf, r := c.load(vout), leg.Rectifier.Threshold, leg.Winding+leg.Rectifier.Slope
	return voltSeconds{
		base: vout + vf + i*r, excess: leg.HighSide - leg.Rectifier.Slope, inv: 1 / (c.Vin + vf),
		load: i, slope: c.Conductance * (c.Vin + vf) / (1 + c.Conductance*r),
	}
}

// first returns the duty ratio at which the high side carries its share of the
// mean current.
func (vs *voltSeconds) first() float64 { return vs.base * vs.inv / (1 - vs.excess*vs.load*vs.inv) }

// next returns the duty ratio after d, where the high side carried the mean
// current q/T = high. The balance gives it but for the change of q with D, which
// the slope accounts for; the step's error is the product of two small numbers.
func (vs *voltSeconds) next(d, high float64) float64 {
	return d + ((vs.base+vs.excess*high)*vs.inv-d)/(1-vs.excess*vs.inv*(vs.load+d*vs.slope))
}

// regulated solves for the duty ratio that makes the mean output vout.
func (ob *oneBank) regulated(c *Circuit, vout, least, greatest float64, sol *Solution) bool {
	ob.set(c)
	vs := c.voltSeconds(vout)
	blocks := c.Leg.Rectifier.Blocks
	if blocks && vout < c.Vin && vs.load > 0 {
		t1, t2 := c.firstRest(vout)
		if t1+t2 < c.Period && ob.regulatedResting(c, vout, least, greatest, t1, t2, sol) {
			return true
		}
	}
	d := vs.first()
	for n := range maxDuty {
		if !(d > least && d < greatest) || !ob.continuous(c, d, vout) {
			return false
		}
		if peak, valley := vs.load+ob.off.i0, vs.load+ob.off.i1; blocks && valley < 0 {
			return peak > 0 && ob.regulatedResting(c, vout, least, greatest, ob.t1, ob.t2*peak/(peak-valley), sol)
		}
		next := vs.next(d, d*(vs.load+ob.on.ci.mean(ob.on.order)))
		if math.Abs(next-d) <= dutyAccuracy*d {
			ob.report(c, sol)
			sol.Iterations = n + 1
			return true
		}
		d = next
	}
	return false
}

// report writes the figures of the state; t3 is zero in continuous conduction.
func (ob *oneBank) report(c *Circuit, sol *Solution) {
	leg := &c.Leg
	on, off := &ob.on, &ob.off
	perT := 1 / c.Period
	w1, w2 := ob.t1*perT, ob.t2*perT
	i1, i2 := on.ci.mean(on.order), off.ci.mean(off.order)
	v1, v2 := on.cv.mean(on.order), off.cv.mean(off.order)
	s1, s2 := on.ci.spread(on.order), off.ci.spread(off.order)
	m1, m2 := ob.i+i1, ob.i+i2
	high := w1 * (m1*m1 + s1)
	rect := w2 * (m2*m2 + s2)
	ls := &sol.Leg
	ls.Mode = Continuous
	ls.Conduct = w2
	ls.HighSide = Branch{w1 * m1, math.Sqrt(high)}
	ls.Rectifier = Branch{w2 * m2, math.Sqrt(rect)}
	ls.Inductor = Branch{ls.HighSide.Mean + ls.Rectifier.Mean, math.Sqrt(high + rect)}
	ls.TurnOn = ob.i + on.i0
	ls.TurnOff = ob.i + off.i0
	swing := between(on.i0, off.i0)
	on.ci.extremes(on.order, &swing)
	off.ci.extremes(off.order, &swing)

	// Bank current j = α (ι − G ν) and node o = α ν + ρ ι, series again.
	g, alpha, rho := ob.conductance, ob.alpha, ob.rho
	o1, o2 := alpha*v1+rho*i1, alpha*v2+rho*i2
	mean := w1*o1 + w2*o2
	if ob.t3 > 0 {
		mean += ob.t3 * perT * alpha * ob.rest.mean
	}
	j1, j2 := i1+ob.extra, i2+ob.extra
	j := w1*(j1*j1+s1) + w2*(j2*j2+s2)
	if g != 0 {
		j1, j2 = alpha*(j1-g*v1), alpha*(j2-g*v2)
		j = w1*(j1*j1+ob.spread(on, alpha, -alpha*g)) + w2*(j2*j2+ob.spread(off, alpha, -alpha*g))
	}
	variance := 0.0
	if g != 0 {
		variance = w1*((o1-mean)*(o1-mean)+ob.spread(on, rho, alpha)) + w2*((o2-mean)*(o2-mean)+ob.spread(off, rho, alpha))
	}
	sol.BankMean[0] = ob.v + w1*v1 + w2*v2
	if ob.t3 > 0 {
		r, w3 := &ob.rest, ob.t3*perT
		swing.add(0)
		part := alpha*r.mean - mean
		variance += w3 * (part*part + alpha*alpha*r.variance)
		j += w3 * r.square
		sol.BankMean[0] += w3 * r.mean
	}
	ls.Valley, ls.Peak = ob.i+swing.least, ob.i+swing.most
	sol.BankRMS[0] = math.Sqrt(j)
	sol.OutputMean = ob.node + mean
	sol.Duty = ob.duty
	sol.InputMean, sol.InputRMS = ls.HighSide.Mean, ls.HighSide.RMS
	sol.InputPower = c.Vin * sol.InputMean
	sol.OutputPower = sol.OutputMean*c.load(sol.OutputMean) + g*variance
	loss := leg.Winding*(high+rect) + leg.HighSide*high + leg.Rectifier.Slope*rect +
		leg.Rectifier.Threshold*ls.Rectifier.Mean + c.Bank[0].ESR*j
	scale := greater(greater(math.Abs(sol.InputPower), math.Abs(sol.OutputPower)), c.Vin*ls.HighSide.RMS)
	sol.EnergyBalance = 0
	if residual := sol.InputPower - sol.OutputPower - loss; residual != 0 {
		sol.EnergyBalance = math.Abs(residual) / scale
	}
	sol.Residual = ob.closure()
	sol.Status = Solved
	if !(sol.OutputMean > 0) {
		sol.Status = NoOperatingPoint
	}
}

// outputRange writes the extremes of the node, at edges or inside.
func (ob *oneBank) outputRange(sol *Solution) {
	alpha, rho := ob.alpha, ob.rho
	on, off := &ob.on, &ob.off
	node := between(alpha*on.v0+rho*on.i0, alpha*off.v0+rho*off.i0)
	ob.combine(on, rho, alpha)
	ob.mix.extremes(on.order, &node)
	ob.combine(off, rho, alpha)
	ob.mix.extremes(off.order, &node)
	if ob.t3 > 0 {
		node.add(alpha * ob.rest.start)
		node.add(alpha * (ob.rest.start + ob.rest.change))
	}
	sol.OutputMin, sol.OutputMax = ob.node+node.least, ob.node+node.most
}

// combine forms the series a ι + b ν.
func (ob *oneBank) combine(pl *plane, a, b float64) {
	mix, ci, cv := &ob.mix, &pl.ci, &pl.cv
	mix[0] = a*ci[0] + b*cv[0]
	mix[1] = a*ci[1] + b*cv[1]
	mix[2] = a*ci[2] + b*cv[2]
	mix[3] = a*ci[3] + b*cv[3]
	mix[4] = a*ci[4] + b*cv[4]
	mix[5] = a*ci[5] + b*cv[5]
	mix[6] = a*ci[6] + b*cv[6]
	mix[7] = a*ci[7] + b*cv[7]
	mix[8] = a*ci[8] + b*cv[8]
	for k := planeShort + 1; k <= pl.order; k++ {
		ob.mix[k] = a*pl.ci[k] + b*pl.cv[k]
	}
}

// spread returns the mean square about the mean of a ι + b ν.
func (ob *oneBank) spread(pl *plane, a, b float64) float64 {
	ob.combine(pl, a, b)
	return ob.mix.spread(pl.order)
}

// closure returns by how much the series fail to meet at the edges, relative to
// the reference: both intervals share σ, so their ends agree only if the
// solution does.
func (ob *oneBank) closure() float64 {
	on, off := &ob.on, &ob.off
	if ob.t3 > 0 {
		return max(math.Abs(ob.left)/math.Abs(off.i0), math.Abs(ob.rest.start+ob.rest.change-on.v0)/math.Abs(ob.v))
	}
	di := greater(math.Abs(off.i1-on.i0), math.Abs(on.i1-off.i0))
	dv := greater(math.Abs(off.v1-on.v0), math.Abs(on.v1-off.v0))
	current, voltage := math.Abs(ob.i)+math.Abs(on.i1-on.i0), math.Abs(ob.v)
	switch {
	case voltage == 0:
		return di + dv
	case current == 0:
		return dv / voltage
	}
	return greater(di*voltage, dv*current) / (current * voltage)
}
