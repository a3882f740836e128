package sizing

import (
	"fmt"
	"math"

	"railproof/calc/parts"
	"railproof/calc/preferred"
)

// inductance sets the window of one phase's inductance and chooses a part.
func (z *sizer) inductance() {
	r := z.req
	io := r.LoadCurrent.Max / z.phases
	z.rippleMost = z.want.InductorRippleRatio * io
	z.saturationAt = roundUp(saturationMargin * math.Max(io+z.rippleMost/2, z.transientPeak()))
	w := Window{Name: "inductance_h", Unit: "H"}
	w.Bounds = append(w.Bounds, z.rippleInductance("inductor-ripple", "targets/inductor_ripple_ratio", bothLoads, z.rippleMost))
	if down := z.want.ContinuousDownTo; known(down) {
		w.Bounds = append(w.Bounds, z.continuousInductance(down))
	}
	if s := z.want.LoadStep; known(s.Step) && known(s.Recovery) {
		w.Bounds = append(w.Bounds, z.recoveryInductance(true), z.recoveryInductance(false))
	}
	least, most := w.Least(), w.Most()
	w.Series = z.choice.InductorSeries
	wish := least.Part * z.try.inductance
	if most != nil {
		wish = math.Max(least.Part, math.Min(wish, most.Part))
	}
	z.rated = w.Series.AtLeast(wish)
	if most != nil && z.rated > most.Part && w.Series.AtMost(most.Part) >= least.Part {
		z.rated = w.Series.AtMost(most.Part)
	}
	for _, finer := range [...]preferred.Series{preferred.E12, preferred.E24, preferred.E96} {
		if most == nil || z.rated <= most.Part {
			break
		}
		w.Series, z.rated = finer, finer.AtLeast(least.Part)
	}
	if most != nil && z.rated > most.Part && z.rippleIsOurs(least) {
		z.want.InductorRippleRatio *= 1.25
		z.assume("targets/inductor_ripple_ratio", z.want.InductorRippleRatio, 0.2, mostRippleRatio, "ripple target not given: raised for the sake of the recovery time")
		z.inductance()
		return
	}
	if most != nil && z.rated > most.Part {
		z.conflict("inductance", least.Part, most.Part, "H", fmt.Sprintf("%s asks for more inductance than %s allows", least.Constraint, most.Constraint), least.Field, most.Field)
	}
	w.Preferred, w.Count = z.rated, 1
	z.leastL = parts.Inductor{Inductance: z.rated * (1 - inductanceTol), InductanceAtCurrent: table(saturation[:], z.saturationAt)}
	z.mostL = z.rated * (1 + inductanceTol)
	w.Chosen = z.leastL.InductanceOver(io-z.rippleMost/2, io+z.rippleMost/2)
	z.ans.Windows = append(z.ans.Windows, w)
}

// mostRippleRatio is how far a ripple target that was not given is raised.
const mostRippleRatio = 0.8 // [1]

// rippleIsOurs reports whether a bound stems from a ripple target that was not given
// and may still be raised.
func (z *sizer) rippleIsOurs(b *Bound) bool {
	return b.Constraint == "inductor-ripple" && !known(z.req.Targets.InductorRippleRatio) && 1.25*z.want.InductorRippleRatio <= mostRippleRatio
}

// transientPeak returns the greatest current of one phase while the load step is
// recovered as fast as possible: the inductor must exceed the new load by
// ΔI sqrt(D) to make up for the charge lost.
//
// Source: time-optimal recovery, derived; checked by TestTimeOptimalRecovery.
func (z *sizer) transientPeak() float64 {
	s := z.want.LoadStep
	io := z.req.LoadCurrent.Max
	if !known(s.Step) {
		return io / z.phases
	}
	return (io + s.Step*math.Sqrt(IdealDuty(z.req.Input.Min, z.req.Output))) / z.phases
}

// left returns what is left of the rated inductance at a mean current and ripple,
// tolerance included.
func (z *sizer) left(i, ripple float64) float64 {
	unit := parts.Inductor{Inductance: 1 - inductanceTol, InductanceAtCurrent: table(saturation[:], z.saturationAt)}
	return unit.InductanceOver(i-ripple/2, i+ripple/2)
}

// rippleInductance returns the bound that holds the ripple of one phase to a
// current at every operating point of the loads given.
func (z *sizer) rippleInductance(constraint, field string, l loads, ripple float64) Bound {
	c, v := z.worst(l, func(c *corner) float64 { return modelMargin * c.flux(z.fsLow) / (ripple * z.left(c.i, ripple)) })
	k := z.left(c.i, ripple)
	return Bound{
		Side: AtLeast, Constraint: constraint, Field: field, Value: v * k, Part: v, Factor: k,
		Ideal:   InductanceForRipple(z.req.Input.Max, z.req.Output, ripple, z.fs),
		Corner:  c.Corner,
		Formula: "L = kM * Von * Voff / ((Von + Voff) * dI * fs)",
		Inputs:  []Input{{"kM", modelMargin, "1"}, {"Von", c.on, "V"}, {"Voff", c.off, "V"}, {"dI", ripple, "A"}, {"fs", z.fsLow, "Hz"}},
		Source:  "volt-second balance; M. H. Rashid, Power Electronics, 4th ed., Example 5.5",
	}
}

// continuousInductance returns the bound that keeps conduction continuous down to a
// load: the ripple of one phase is at most twice its mean there. It is held at every
// load, as boundary_load_a is compared at every load; a loaded inductor has less
// inductance than at the boundary itself, which makes this cautious.
func (z *sizer) continuousInductance(down float64) Bound {
	b := z.rippleInductance("continuous-conduction", "targets/continuous_down_to_a", bothLoads, 2*down/z.phases)
	b.Ideal = InductanceForContinuous(z.req.Input.Max, z.req.Output, down/z.phases, z.fs)
	b.Source = "ripple twice the mean at the boundary; N. Mohan, T. Undeland, W. Robbins, Power Electronics, Problem 7-1"
	return b
}

// recoveryInductance returns the bound above which not even the fastest possible
// control recovers from the load step in time.
//
//	rise: t = ΔI/N L [(1 + √D)/Von + √D/Voff]
//	fall: t = ΔI/N L [(1 + √(1 − D))/Voff + √(1 − D)/Von]
//
// Source: time-optimal load step, derived; checked by TestTimeOptimalRecovery.
func (z *sizer) recoveryInductance(rise bool) Bound {
	s := z.want.LoadStep
	slope := func(c *corner) float64 { return recoverySlowness(c.on, c.off, rise) }
	c, v := z.worst(greatestLoad, slope)
	b := Bound{
		Side: AtMost, Constraint: "step-recovery-rise", Field: "targets/load_step/recovery_s", Corner: c.Corner,
		Factor:  1 + inductanceTol,
		Value:   s.Recovery * z.phases / (s.Step * v),
		Formula: "L = tr * N / (dIs * ((1 + sqrt(D)) / Von + sqrt(D) / Voff))",
		Inputs:  []Input{{"tr", s.Recovery, "s"}, {"N", z.phases, "1"}, {"dIs", s.Step, "A"}, {"D", c.duty, "1"}, {"Von", c.on, "V"}, {"Voff", c.off, "V"}},
		Source:  "time-optimal recovery, derived",
	}
	if !rise {
		b.Constraint = "step-recovery-fall"
		b.Formula = "L = tr * N / (dIs * ((1 + sqrt(1 - D)) / Voff + sqrt(1 - D) / Von))"
	}
	b.Part = b.Value / b.Factor
	ideal := func(vin float64) float64 { return recoverySlowness(vin-z.req.Output, z.req.Output, rise) }
	b.Ideal = s.Recovery * z.phases / (s.Step * math.Max(ideal(z.req.Input.Min), ideal(z.req.Input.Max)))
	return b
}

// recoverySlowness returns the time of the fastest recovery per ampere and henry
// [s/(A H)].
func recoverySlowness(on, off float64, rise bool) float64 {
	duty := off / (on + off)
	if !rise {
		on, off, duty = off, on, 1-duty
	}
	return (1+math.Sqrt(duty))/on + math.Sqrt(duty)/off
}
