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
	duty, t1, t2, t3         float64
	on, off                  plane
	oi, ov                   [planeOrder + 1]float64
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
// With the interval maps of both, ξ → ξ + F_1 ξ + d_1 and the like,
//
//	(F_1 + F_2 + F_2 F_1) ξ = −(d_1 + d_2 + F_2 d_1)
//
// whose determinant is of the order (ωT)² in numbers of the order ωT: no
// cancellation.
func (ob *oneBank) continuous(c *Circuit, duty, v float64) bool {
	leg := &c.Leg
	i := c.load(v)
	ob.v, ob.i, ob.duty = v, i, duty
	ob.t1 = duty * c.Period
	ob.t2 = (1 - duty) * c.Period
	ob.t3 = 0
	r1, r2 := leg.Winding+leg.HighSide, leg.Winding+leg.Rectifier.Slope
	if !ob.on.set(ob, ob.t1, r1, c.Vin-v-r1*i) || !ob.off.set(ob, ob.t2, r2, -leg.Rectifier.Threshold-v-r2*i) {
		return false
	}
	a, b := &ob.on.full, &ob.off.full
	m11 := a.f11 + b.f11 + (b.f11*a.f11 + b.f12*a.f21)
	m12 := a.f12 + b.f12 + (b.f11*a.f12 + b.f12*a.f22)
	m21 := a.f21 + b.f21 + (b.f21*a.f11 + b.f22*a.f21)
	m22 := a.f22 + b.f22 + (b.f21*a.f12 + b.f22*a.f22)
	d1 := a.d1 + b.d1 + (b.f11*a.d1 + b.f12*a.d2)
	d2 := a.d2 + b.d2 + (b.f21*a.d1 + b.f22*a.d2)
	q := 1 / (m11*m22 - m12*m21)
	ob.on.start((m12*d2-m22*d1)*q, (m21*d1-m11*d2)*q)
	ob.off.start(ob.on.i1, ob.on.v1)
	return true
}

// onMean returns ∫ι dτ over the on-time after expand.
func (pl *plane) chargeAbout() float64 {
	acc := 0.0
	for k := pl.order &^ 1; k >= 0; k -= 2 {
		acc += pl.ci[k] * inverse[k+1]
	}
	return 2 * pl.h * acc
}

// fixed solves at a duty ratio. It reports false when the general solver is
// needed.
func (ob *oneBank) fixed(c *Circuit, duty float64, sol *Solution) bool {
	ob.set(c)
	if !ob.continuous(c, duty, c.averagedOutput(duty)) {
		return false
	}
	if c.Leg.Rectifier.Blocks && ob.i+ob.off.i1 < 0 {
		return false
	}
	ob.on.expand()
	ob.off.expand()
	ob.report(c, sol)
	sol.Iterations = 1
	return true
}

// regulated solves for the duty ratio that makes the mean output vout. The
// volt-second balance of the inductor over a period is exact,
//
//	D (Vin + V_F) = V + V_F + I (R_w + R_r) + (R_hs − R_r) q/T,   I = I_0 + G V
//
// with q the charge through the high side; q from one exact solution gives the
// next duty ratio, which is off by the product of two small numbers.
func (ob *oneBank) regulated(c *Circuit, vout, least, greatest float64, sol *Solution) bool {
	ob.set(c)
	leg := &c.Leg
	vf := leg.Rectifier.Threshold
	i := c.load(vout)
	dr := leg.HighSide - leg.Rectifier.Slope
	base := vout + vf + i*(leg.Winding+leg.Rectifier.Slope)
	inv := 1 / (c.Vin + vf)
	d := base / (c.Vin + vf - dr*i)
	for n := range maxDuty {
		if !(d > least && d < greatest) {
			return false
		}
		if !ob.continuous(c, d, vout) || leg.Rectifier.Blocks && i+ob.off.i1 < 0 {
			return false
		}
		ob.on.expand()
		next := (base + dr*(i*d+ob.on.chargeAbout()/c.Period)) * inv
		if math.Abs(next-d) <= dutyAccuracy*d {
			ob.off.expand()
			ob.report(c, sol)
			sol.Iterations = n + 1
			return true
		}
		d = next
	}
	return false
}

// report writes the figures of the state in continuous conduction.
func (ob *oneBank) report(c *Circuit, sol *Solution) {
	leg := &c.Leg
	on, off := &ob.on, &ob.off
	perT := 1 / c.Period
	w1, w2 := ob.t1*perT, ob.t2*perT
	var li1, li2, lv1, lv2 legendreSeries
	project(&on.ci, on.order, &li1)
	project(&off.ci, off.order, &li2)
	project(&on.cv, on.order, &lv1)
	project(&off.cv, off.order, &lv2)
	m1, m2 := ob.i+li1[0], ob.i+li2[0]
	s1, s2 := li1.spread(), li2.spread()
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
	ls.Peak = math.Max(ls.TurnOn, ls.TurnOff)
	ls.Valley = math.Min(ls.TurnOn, ls.TurnOff)
	if e, ok := interior(&on.ci, on.order); ok {
		ls.Peak, ls.Valley = math.Max(ls.Peak, ob.i+e), math.Min(ls.Valley, ob.i+e)
	}
	if e, ok := interior(&off.ci, off.order); ok {
		ls.Peak, ls.Valley = math.Max(ls.Peak, ob.i+e), math.Min(ls.Valley, ob.i+e)
	}

	// Bank current j = α (ι − G ν) and node o = α ν + ρ ι, both series again.
	g, alpha, rho := ob.conductance, ob.alpha, ob.rho
	j := w1*(li1[0]*li1[0]+s1) + w2*(li2[0]*li2[0]+s2)
	meanV := w1*lv1[0] + w2*lv2[0]
	o1, o2 := alpha*lv1[0]+rho*li1[0], alpha*lv2[0]+rho*li2[0]
	mean := w1*o1 + w2*o2
	variance := 0.0
	if g != 0 {
		j = ob.bank(w1, &li1, &lv1) + ob.bank(w2, &li2, &lv2)
		for k := range li1 {
			lv1[k] = alpha*lv1[k] + rho*li1[k]
			lv2[k] = alpha*lv2[k] + rho*li2[k]
		}
		d1, d2 := o1-mean, o2-mean
		variance = w1*(d1*d1+lv1.spread()) + w2*(d2*d2+lv2.spread())
	}
	sol.BankRMS[0] = math.Sqrt(j)
	sol.BankMean[0] = ob.v + meanV
	sol.OutputMean = ob.v + mean
	low, top := ob.nodeRange()
	sol.OutputMin, sol.OutputMax = ob.v+low, ob.v+top
	sol.Duty = ob.duty
	sol.InputMean, sol.InputRMS = ls.HighSide.Mean, ls.HighSide.RMS
	sol.InputPower = c.Vin * sol.InputMean
	sol.OutputPower = sol.OutputMean*c.load(sol.OutputMean) + g*variance
	loss := leg.Winding*(high+rect) + leg.HighSide*high + leg.Rectifier.Slope*rect +
		leg.Rectifier.Threshold*ls.Rectifier.Mean + c.Bank[0].ESR*j
	scale := math.Max(math.Max(math.Abs(sol.InputPower), math.Abs(sol.OutputPower)), c.Vin*ls.HighSide.RMS)
	sol.EnergyBalance = math.Abs(sol.InputPower-sol.OutputPower-loss) / scale
	closure := math.Abs(off.i1-on.i0)*math.Abs(ob.v) + math.Abs(off.v1-on.v0)*math.Max(math.Abs(ls.Peak), math.Abs(ls.Valley))
	sol.Residual = closure / (math.Abs(ob.v) * math.Max(math.Abs(ls.Peak), math.Abs(ls.Valley)))
	sol.Status = Solved
	if !(sol.OutputMean > 0) {
		sol.Status = NoOperatingPoint
	}
}

// bank returns the part of an interval in the mean square of the bank current.
func (ob *oneBank) bank(w float64, li, lv *legendreSeries) float64 {
	var j legendreSeries
	for k := range j {
		j[k] = ob.alpha * (li[k] - ob.conductance*lv[k])
	}
	return w * (j[0]*j[0] + j.spread())
}

// nodeRange returns the extremes of the node's deviation.
func (ob *oneBank) nodeRange() (least, most float64) {
	alpha, rho := ob.alpha, ob.rho
	a := alpha*ob.on.v0 + rho*ob.on.i0
	b := alpha*ob.off.v0 + rho*ob.off.i0
	least, most = math.Min(a, b), math.Max(a, b)
	for _, pl := range [2]*plane{&ob.on, &ob.off} {
		for k := 0; k <= pl.order; k++ {
			ob.ov[k] = alpha*pl.cv[k] + rho*pl.ci[k]
		}
		if e, ok := interior(&ob.ov, pl.order); ok {
			least, most = math.Min(least, e), math.Max(most, e)
		}
	}
	return least, most
}
