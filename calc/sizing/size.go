package sizing

import (
	"errors"
	"math"

	"railproof/calc/stage"
)

// trials are the ways of drawing up a draft, from the smallest and cheapest parts
// on: lower resistances, then larger inductors, which have less ripple and core loss.
// The last one serves inputs that are hardly above the output.
var trials = [...]trial{
	{1, 1},
	{0.7, 1},
	{0.5, 1},
	{0.35, 1},
	{0.25, 1},
	{0.17, 1},
	{0.12, 1},
	{0.25, 1.8},
	{0.12, 1.8},
	{0.25, 3.2},
	{0.12, 3.2},
	{0.12, 5.6},
	{0.06, 1},
}

// Size sizes a stage for a requirement that has passed its Check. For a range of
// switching frequencies it sizes at each frequency of the sweep and takes the one
// that Select names.
func Size(req *stage.Requirement, choice Choices) Answer {
	fs := Frequencies(req, choice)
	if len(fs) == 1 {
		a := SizeAt(req, choice, fs[0])
		a.Verify()
		a.VerifyStep(req)
		return a
	}
	answers := make([]Answer, len(fs))
	for k, f := range fs {
		answers[k] = SizeAt(req, choice, f)
	}
	a := Select(req, answers)
	a.Verify()
	a.VerifyStep(req)
	return a
}

// SizeAt sizes a stage at one switching frequency [Hz]: the chunk of a sweep. It is
// pure; the checks on the exact engine over all corners are Verify's.
func SizeAt(req *stage.Requirement, choice Choices, fs float64) (a Answer) {
	for range InPieces(req, choice, fs, &a) {
	}
	return a
}

// InPieces is SizeAt into dst for a caller that looks about in between: it yields
// every few milliseconds. Left before its end it gives no answer.
func InPieces(req *stage.Requirement, choice Choices, fs float64, dst *Answer) func(yield func() bool) {
	return func(yield func() bool) {
		p := &pace{yield: yield}
		if a := sizeAt(req, choice, fs, p); !p.left {
			*dst = a
		}
	}
}

func sizeAt(req *stage.Requirement, choice Choices, fs float64, p *pace) Answer {
	var best *sizer
	for _, try := range trials {
		if try.inductance > 1 && !known(req.Targets.Efficiency) && best.judged.cool(best) {
			continue // loss alone, which nobody limits, is no reason for a larger inductor
		}
		z := newSizer(req, choice, fs, try, p)
		z.run()
		if z.failed() {
			if best == nil || best.failed() {
				best = z // of failures the last: it has the least drops
			}
			if z.hopeless() {
				break
			}
			continue
		}
		j := z.judge()
		if !p.goesOn() {
			return Answer{}
		}
		if best == nil || best.failed() || j.better(best.judged) {
			best = z
		}
		z.judged = j
		if j.meets(z) {
			best = z
			break
		}
	}
	if !best.failed() {
		best.conclude()
		best = best.calmer()
	}
	if p.left {
		return Answer{}
	}
	best.ans.Status = OK
	if best.failed() {
		best.ans.Status = Infeasible
		best.ans.Stage, best.ans.Spreads, best.ans.Limits = nil, nil, nil
	}
	return best.ans
}

// calmer returns the draft, or where its loop does not settle after the load step one
// whose output bank leaves a slower loop enough.
func (z *sizer) calmer() *sizer {
	for _, share := range [...]float64{0.05, 0.025} {
		if z.settles || z.failed() || z.pace.left {
			break
		}
		n := newSizer(z.req, z.choice, z.fs, z.try, z.pace)
		n.share = share
		if n.run(); n.failed() {
			continue
		}
		if n.judged = n.judge(); z.judged.meets(z) && !n.judged.meets(n) {
			continue
		}
		if n.conclude(); n.settles && !n.failed() {
			return n
		}
	}
	return z
}

// run goes through the steps up to a complete draft; it stops at the first step
// that finds the requirement impossible.
func (z *sizer) run() {
	z.newDraft()
	z.controller()
	z.budget()
	if z.failed() {
		return
	}
	z.regulation()
	z.duty()
	if z.failed() {
		return
	}
	z.inductor()
	if z.failed() {
		return
	}
	for _, step := range [...]func(){z.output, z.input} {
		if step(); z.failed() {
			return
		}
	}
	z.ratings()
	z.modulator()
	z.life()
	z.spreads()
	z.conditions()
	z.inRange()
}

// inRange records a placeholder that would lie outside what the contract takes for a
// part, which happens at absurd powers, voltages or frequencies.
func (z *sizer) inRange() {
	var invalid *stage.InvalidError
	if errors.As(z.draft.Check(), &invalid) {
		f := invalid.Faults[0]
		z.conflict("part-range", f.Given, f.Limit, "1", "no such part: "+f.Field+" of the draft would be "+f.Detail, "load/max_a", "input/max_v", "switching_frequency_hz")
	}
}

// inductor sizes the inductor; where no winding keeps within the budget the drops
// are larger than budgeted, and the windows are computed again with them.
func (z *sizer) inductor() {
	const rounds = 4 // [1] each raises the budget to the part found; two are usual
	windows := len(z.ans.Windows)
	for range rounds {
		z.ans.Windows = z.ans.Windows[:windows]
		z.inductance()
		if z.failed() {
			return
		}
		_, z.inductorRMS = z.worst(bothLoads, func(c *corner) float64 {
			valley, peak := z.swing(c)
			return TriangleRMS(c.i, peak-valley)
		})
		if z.winding() {
			return
		}
	}
}

// conclude adds what rests on the whole draft.
func (z *sizer) conclude() {
	z.limits()
	z.judged.conflicts(z)
	if !z.failed() && !z.compensator() {
		z.note("loop-not-designed", "switching_frequency_hz", "no compensator of the draft's kind gives a stable loop; the draft has a modulator and none")
	}
	z.ans.Stage = z.draft
	z.placeholders()
	z.row()
}

// row fills the sweep's row of this frequency.
func (z *sizer) row() {
	d := z.draft
	_, ripple := z.worst(bothLoads, func(c *corner) float64 { v, p := z.swing(c); return p - v })
	total := 0.0
	for k := range d.OutputCapacitors {
		total += d.OutputCapacitors[k].Capacitance * d.OutputCapacitors[k].Pieces()
	}
	first := &d.OutputCapacitors[0]
	b := bank{make: makeOf(first.Kind)}
	b.left, b.grown = z.worstOf(first, z.voHigh)
	_, output := z.worst(bothLoads, func(c *corner) float64 {
		v, p := z.swing(c)
		sum, rising := z.summed(c, p-v)
		return OutputRipple(sum, rising, z.phases*z.fsLow, b.least(first), b.most(first))
	})
	z.ans.Sweep = []Row{{
		Frequency: z.fs, Status: OK, Inductance: z.rated, OutputCapacitance: total, InputCapacitance: d.InputCapacitors[0].Capacitance * d.InputCapacitors[0].Pieces(),
		InductorRipple: ripple, OutputRipple: output, OnTime: z.shortestOn, OnTimeMargin: z.shortestOn / z.choice.MinOnTime,
		Loss: z.judged.typicalLoss, Efficiency: z.judged.typicalEfficiency,
	}}
	if math.IsInf(z.ans.Sweep[0].OnTimeMargin, 1) {
		z.ans.Sweep[0].OnTimeMargin = math.NaN()
	}
}
