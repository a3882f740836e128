package sizing_test

import (
	"math"
	"strings"
	"testing"

	"github.com/stretchr/testify/assert"
	"github.com/stretchr/testify/require"

	"railproof/calc/evaluate"
	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/sizing"
	"railproof/calc/stage"
)

// confirm checks an infeasible verdict by trying what else could have been done.
func confirm(t *testing.T, k int, req *stage.Requirement, c *sizing.Conflict) {
	t.Helper()
	assert.NotEmpty(t, c.Fields)
	assert.NotEmpty(t, c.Unit)
	assert.NotEqual(t, c.Needed, c.Available)
	for _, f := range c.Fields {
		assert.True(t, strings.Contains(f, "/") || f == "switching_frequency_hz", f)
	}
	try, ok := confirmations[c.Constraint]
	require.True(t, ok, "%d: no confirmation of %s", k, c.Constraint)
	try(t, k, req, c)
}

var confirmations = map[string]func(*testing.T, int, *stage.Requirement, *sizing.Conflict){
	"least-on-time": everyStageFails(evaluate.TooShortOnTime),
	"greatest-duty": everyStageFails(evaluate.DropOut),
	"efficiency":    noStageIsEfficient,
	"inductance":    noInductanceServes,
	"hold-up":       noReferenceHolds,
}

// relaxed sizes a requirement from which what conflicts was taken away, to have a
// stage for the grids to begin with.
func relaxed(t *testing.T, req *stage.Requirement) (sizing.Answer, *stage.Requirement) {
	t.Helper()
	r := *req
	r.Targets.Efficiency, r.Targets.LoadStep.Recovery, r.Targets.HoldUp.Time = parts.Unknown, parts.Unknown, parts.Unknown
	c := sizing.NewChoices()
	c.MinOnTime, c.MinOffTime, c.MaxDutyRatio = 0, 0, 1
	a := sizing.SizeAt(&r, c, r.SwitchingFrequency.Min)
	require.True(t, a.Status.OK(), "%v", a.Conflicts)
	a.Stage.Controller.MinOnTime, a.Stage.Controller.MinOffTime, a.Stage.Controller.MaxDutyRatio = 1e-7, 2e-7, 0.98
	return a, &r
}

// logarithmic calls f for n values from a to b in equal ratios.
func logarithmic(a, b float64, n int, f func(float64)) {
	for k := range n {
		f(a * math.Pow(b/a, float64(k)/float64(n-1)))
	}
}

// everyStageFails evaluates stages over a grid of inductance and resistances, up to
// those of the loss budget, and expects each to fail with the status at a corner.
func everyStageFails(status evaluate.Status) func(*testing.T, int, *stage.Requirement, *sizing.Conflict) {
	return func(t *testing.T, k int, req *stage.Requirement, _ *sizing.Conflict) {
		a, r := relaxed(t, req)
		for _, l := range [...]float64{0.1, 0.5, 1, 3, 10} {
			logarithmic(0.06, 1, 6, func(ohm float64) {
				s := a.Stage.Clone()
				s.Inductor.Inductance *= l
				for _, v := range [...]*float64{&s.HighSide.OnResistance, &s.LowSide.OnResistance, &s.Inductor.DCResistance, &s.Diode.Slope} {
					*v *= ohm
				}
				assert.True(t, failsSomewhere(s, &a, r, status), "%d: inductance x%g, resistances x%.2g", k, l, ohm)
			})
		}
	}
}

// failsSomewhere evaluates a stage at the ends of input and load with the spreads
// that bear on the duty ratio at either end.
func failsSomewhere(s *stage.Stage, a *sizing.Answer, r *stage.Requirement, status evaluate.Status) bool {
	e := evaluate.Prepare(s)
	n := map[string]*float64{}
	for _, f := range e.Stage().Fields() {
		n[f.ID] = f.Value
	}
	base := map[string]float64{}
	for id, v := range n {
		base[id] = *v
	}
	var res evaluate.Result
	for _, high := range [2]bool{true, false} { // output high, resistances high: duty high
		for _, v := range a.Spreads {
			up := high
			switch v.Field {
			case "feedback/lower_ohm":
				up = !high
			case "switching_frequency_hz":
				up = true
			}
			*n[v.Field] = base[v.Field] * v.Min / v.Typ
			if up {
				*n[v.Field] = base[v.Field] * v.Max / v.Typ
			}
		}
		for _, vin := range [2]float64{r.Input.Min, r.Input.Max} {
			for _, io := range [2]float64{r.LoadCurrent.Min, r.LoadCurrent.Max} {
				for _, ta := range [2]float64{r.AmbientDegC.Min, r.AmbientDegC.Max} {
					p := stage.Point{Input: vin, SourceResistance: r.SourceResistance, Load: stage.Load{Current: io}, AmbientDegC: ta, PartTemperatureDegC: parts.Unknown, Control: stage.Control{Kind: stage.ByFeedback}}
					e.Eval(&p, &res)
					if res.Status == status {
						return true
					}
				}
			}
		}
	}
	return false
}

// noStageIsEfficient looks for a stage that keeps the efficiency target over dies of
// both switches, inductances and sizes of inductor, with the placeholders' own
// technology.
func noStageIsEfficient(t *testing.T, k int, req *stage.Requirement, c *sizing.Conflict) {
	a, r := relaxed(t, req)
	best := 0.0
	mean := r.LoadCurrent.Max / float64(r.PhaseCount)
	on := a.Stage.HighSide.OnResistance
	for _, l := range [...]float64{1, 1.5, 2.2, 3.3, 4.7, 6.8} {
		for _, size := range [...]float64{1, 2.5, 8} {
			s := a.Stage.Clone()
			h, sat := s.Inductor.Inductance*l, s.Inductor.Rating.Saturation
			s.Inductor = sizing.InductorPlaceholder(h, sat, mean, sizing.WindingLeast(h, sat, size), size, 125)
			e := evaluate.Prepare(s)
			logarithmic(on/20, on*3, 8, func(hs float64) {
				logarithmic(on/20, on*3, 8, func(ls float64) {
					lossy(e.Stage(), s, &a)
					setDie(&e.Stage().HighSide, hs, mean)
					setDie(&e.Stage().LowSide, ls, mean)
					best = math.Max(best, leastEfficiency(e, r, math.Max(best, r.Targets.Efficiency)))
				})
			})
		}
	}
	assert.Less(t, best, req.Targets.Efficiency, "%d: a grid finds a stage of this efficiency; sizing found %g", k, c.Available)
}

// setDie gives a switch the numbers of another die, its losses at the upper end of
// their tolerances.
func setDie(m *parts.MOSFET, on, mean float64) {
	p := sizing.SwitchPlaceholder(m.Rating.DrainSource, on, mean, 125)
	const up = 1.3
	m.OnResistance, m.GateCharge, m.GateSwitchCharge, m.OutputCharge, m.RecoveryCharge = up*p.OnResistance, up*p.GateCharge, up*p.GateSwitchCharge, up*p.OutputCharge, up*p.RecoveryCharge
}

// lossy sets every number of a stage with a spread to the end that loses more.
func lossy(s, typical *stage.Stage, a *sizing.Answer) {
	to := s.Fields()
	from := typical.Fields()
	for _, v := range a.Spreads {
		for i := range to {
			if to[i].ID == v.Field {
				*to[i].Value = *from[i].Value * sizing.LossyEnd(v.Field, v.Min, v.Typ, v.Max) / v.Typ
			}
		}
	}
}

// leastEfficiency returns the least efficiency at the greatest load, or 0 as soon as
// it falls below what is of interest.
func leastEfficiency(e *evaluate.Evaluator, r *stage.Requirement, interest float64) float64 {
	least := 1.0
	var res evaluate.Result
	fs := e.Stage().SwitchingFrequency
	defer func() { e.Stage().SwitchingFrequency = fs }()
	for _, f := range [2]float64{1.08, 0.92} {
		e.Stage().SwitchingFrequency = fs * f
		for _, vin := range [3]float64{r.Input.Max, r.Input.Min, r.Input.Typ} {
			p := stage.Point{Input: vin, SourceResistance: r.SourceResistance, Load: stage.Load{Current: r.LoadCurrent.Max}, AmbientDegC: r.AmbientDegC.Max, AgeRatio: 1, PartTemperatureDegC: parts.Unknown, Control: stage.Control{Kind: stage.ByFeedback}}
			e.Eval(&p, &res)
			if !res.Status.Figures() {
				return 0
			}
			if least = math.Min(least, res.Quantities[quantity.Efficiency]); least < interest {
				return 0
			}
		}
	}
	return least
}

// noInductanceServes looks for an inductance that keeps both the ripple or boundary
// limit and the recovery time.
func noInductanceServes(t *testing.T, k int, req *stage.Requirement, _ *sizing.Conflict) {
	a, r := relaxed(t, req)
	limits := map[quantity.ID]float64{quantity.InductorRipplePP: r.Targets.InductorRippleRatio * r.LoadCurrent.Max / float64(r.PhaseCount)}
	if down := r.Targets.ContinuousDownTo; parts.Known(down) && down > 0 {
		limits[quantity.BoundaryLoad] = down
	}
	b := newBox(&a)
	rated := a.Stage.Inductor.Inductance
	rises := func(field string) bool {
		return !strings.HasSuffix(field, "inductance_h") && field != "switching_frequency_hz" && field != "feedback/lower_ohm"
	}
	logarithmic(0.02, 20, 100, func(x float64) {
		l := rated * x
		tooMuch := false
		b.corners(func() {}, func() {
			if tooMuch {
				return
			}
			b.at(func(i int) bool { return rises(a.Spreads[i].Field) })
			*b.eval.Stage().Field("inductor/inductance_h") = l * 0.8
			b.eval.Eval(&b.point, &b.result)
			for id, most := range limits {
				tooMuch = tooMuch || !(b.result.Quantities[id] <= most) // also where the stage does not work at all
			}
		})
		if tooMuch {
			return
		}
		s := req.Targets.LoadStep
		slowest := 0.0
		for _, vin := range [2]float64{r.Input.Min, r.Input.Max} {
			on, off := vin-r.Output, r.Output
			n := float64(r.PhaseCount)
			slowest = math.Max(slowest, math.Max(fastestRecovery(s.Step, n*on/(1.2*l), n*off/(1.2*l)), fastestRecovery(s.Step, n*off/(1.2*l), n*on/(1.2*l))))
		}
		assert.Greater(t, slowest, s.Recovery, "%d: %g H keeps ripple and recovery", k, l)
	})
}

// fastestRecovery finds by search the least time in which an inductor current that
// can rise at one slope and fall at another returns to its new mean with no charge
// missing: rise for a time, then fall.
func fastestRecovery(step, rise, fall float64) float64 {
	missing := func(t1 float64) (charge, end float64) {
		top := rise*t1 - step // above the new load
		end = t1 + top/fall
		// Triangle below the load, triangle above.
		below := step * step / (2 * rise)
		return below - top*top/2*(1/rise+1/fall), end
	}
	low, high := step/rise, 10*step/rise+10*step/fall
	for range 100 {
		mid := (low + high) / 2
		if q, _ := missing(mid); q > 0 {
			low = mid
		} else {
			high = mid
		}
	}
	_, end := missing(high)
	return end
}

// noReferenceHolds tries every grade of reference and divider.
func noReferenceHolds(t *testing.T, k int, req *stage.Requirement, _ *sizing.Conflict) {
	a, _ := relaxed(t, req)
	f := a.Stage.Feedback
	for _, g := range sizing.Grades() {
		lowest := f.Reference * (1 - g[0]) * (1 + f.Upper*(1-g[1])/(f.Lower*(1+g[1])))
		assert.LessOrEqual(t, lowest, req.Targets.HoldUp.To, "%d: reference %g, resistors %g", k, g[0], g[1])
	}
}
