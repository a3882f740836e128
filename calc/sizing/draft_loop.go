package sizing

import (
	"fmt"
	"iter"
	"math"
	"strings"

	"railproof/calc/evaluate"
	"railproof/calc/loop"
	"railproof/calc/parts"
	"railproof/calc/preferred"
	"railproof/calc/spread"
	"railproof/calc/stage"
	"railproof/calc/transient"
)

const amplifierOhm = 1e7 // [ohm] output resistance of the draft's error amplifier

// transconductances are those of the draft's error amplifier [S]. The greater ones
// keep the network's resistors and capacitors such as can be bought where large
// output banks ask for a high gain.
var transconductances = [...]float64{1e-3, 2.5e-3, 5e-3}

const (
	greatestOhm = 1e6   // [ohm] above it a board's leakage counts
	leastFarad  = 4e-12 // [F] below it a board's own capacitance counts
)

// loopTargets are the crossover, over the switching frequency, and phase margin [deg]
// that the compensator is designed for, the best first.
var loopTargets = [...]struct{ crossover, margin float64 }{
	{crossoverRatio, 60},
	{0.085, 60},
	{0.07, 60},
	{0.07, 50},
	{0.05, 60},
	{0.05, 50},
	{0.04, 55},
	{0.03, 60},
	{0.03, 50},
	{0.02, 55},
	{0.02, 45},
	{0.01, 55},
	{5e-3, 50},
	{2e-3, 45},
	{1e-3, 45},
}

// What the margins of a loop are held to, as common practice has it: at typical values,
// and over the corners with a reserve for what lies between and beside them.
const (
	typicalMargin = 45.0       // [deg] phase margin
	worstMargin   = 30.0 + 5.0 // [deg]
	worstGain     = 6.0 + 0.5  // [dB] gain margin
	worstCross    = 0.2 * 0.97 // [1] crossover over switching frequency
)

// compensator designs a transconductance amplifier with one zero and one pole on the
// exact loop at typical input and the greatest load. The first target is taken whose
// design keeps its margins over the corners and settles after the load step; where
// none settles, the first that keeps its margins; where none does that, the one that
// comes nearest, with a note. False if there is no stable design at all.
func (z *sizer) compensator() bool {
	e := evaluate.Prepare(z.draft)
	var r evaluate.Result
	p := stage.Point{
		Input: z.req.Input.Typ, SourceResistance: z.req.SourceResistance, Load: stage.Load{Current: z.req.LoadCurrent.Max},
		AmbientDegC: z.req.AmbientDegC.Typ, PartTemperatureDegC: parts.Unknown, Control: stage.Control{Kind: stage.ByFeedback},
	}
	if e.Eval(&p, &r); !r.Status.Figures() {
		return false
	}
	d := z.draft
	plant := loop.Plant{Circuit: *e.Circuit(), Modulator: d.Modulator, Feedback: d.Feedback}
	plant.Operate(e.Solution())
	var best parts.Compensator
	reserve, restless := math.Inf(-1), 0
	for _, try := range loopTargets {
		design, ok := z.network(&plant, try.crossover*z.fs, try.margin)
		if !z.pace.goesOn() {
			return false
		}
		if !ok {
			continue
		}
		d.Compensator = design.Compensator
		m := z.loopReserve(&design.Margins, reserve)
		z.settles = m >= 0 && z.stepSettles()
		if z.settles || m > reserve && reserve < 0 {
			best, reserve = d.Compensator, m
			z.crossover, z.phaseMargin = design.Margins.Crossover, design.Margins.PhaseMargin
		}
		if m >= 0 && !z.settles {
			restless++
		}
		if z.settles || restless == mostRestless || z.pace.left {
			break
		}
	}
	d.Compensator = best
	if best.Present && reserve < 0 {
		z.note("loop-margins", "switching_frequency_hz", fmt.Sprintf("no compensator of the draft's kind keeps %g° of phase margin, %g dB of gain margin and a crossover below a fifth of the switching frequency over all corners; the draft has the one that comes nearest", worstMargin, worstGain))
	}
	return best.Present
}

// network designs for one target with the least transconductance at which the parts
// can be bought. It reports false where no design is stable or none can be bought.
func (z *sizer) network(plant *loop.Plant, crossover, margin float64) (design loop.Design, ok bool) {
	var s loop.Sampled
	for _, gm := range transconductances {
		plant.Compensator = parts.Compensator{
			Present: true, Type: parts.TransconductanceType2, Transconductance: gm, OutputOhm: amplifierOhm,
			GainBandwidth: parts.Unknown, OpenLoopGain: parts.Unknown, LeadOhm: parts.Unknown, LeadF: parts.Unknown,
		}
		var err error
		design, err = s.Synthesise(plant, loop.Target{
			Crossover: crossover, PhaseMargin: margin, Type: parts.TransconductanceType2,
			Rounding: loop.Rounding{Resistors: preferred.E24, Capacitors: preferred.E12},
		})
		if err != nil || design.Margins.Stability != loop.Stable || !(design.Margins.PhaseMargin >= typicalMargin) {
			return design, false // a larger amplifier changes neither
		}
		if c := &design.Compensator; c.FeedbackOhm <= greatestOhm && c.FeedbackF >= leastFarad && c.ShuntF >= leastFarad {
			return design, true
		}
	}
	return design, false
}

// loopReserve returns by how much the margins of the draft's loop exceed what they
// are held to over the corners, as a part of it; the least of all counts, and a
// negative one is a shortfall. -Inf: unstable at a corner.
//
// The loop is quickest with the least output capacitance and the greatest series
// resistance, slowest with their other ends, and has the least phase where it is quick
// without the resistance; the inductance counts either way, and the period is the
// longest.
//
// What falls short and is no better than the reserve to beat need not be known.
func (z *sizer) loopReserve(typical *loop.Margins, beat float64) float64 {
	e := evaluate.Prepare(z.draft)
	values := numbers(e.Stage())
	var r evaluate.Result
	var a loop.Analyser
	reserve := typical.PhaseMargin/typicalMargin - 1
	for _, at := range loopCorners {
		for _, at.large = range [2]bool{true, false} {
			for _, v := range z.ans.Spreads {
				*values[v.Field] = at.end(&v)
			}
			for p := range z.conditionCorners(at.age) {
				e.Eval(&p, &r)
				status, err := a.Fill(e, r.Status, &r.Quantities)
				if err == nil && status != loop.NotRegulating { // a light load may ask for less than the least on-time
					reserve = min(reserve, heldMargins(&a.Margins, status, e.Stage().SwitchingFrequency))
				}
				if reserve < 0 && reserve <= beat {
					return reserve
				}
				if !z.pace.goesOn() {
					return math.Inf(-1)
				}
			}
		}
	}
	return reserve
}

// conditionCorners yields the points at the ends of input, ambient and load, where the
// stage holds its output by its feedback.
func (z *sizer) conditionCorners(age float64) iter.Seq[stage.Point] {
	return func(yield func(stage.Point) bool) {
		p := stage.Point{AgeRatio: age, SourceResistance: z.req.SourceResistance, PartTemperatureDegC: parts.Unknown, Control: stage.Control{Kind: stage.ByFeedback}}
		for k := range 8 {
			p.Input = [2]float64{z.req.Input.Max, z.req.Input.Min}[k>>2]
			p.AmbientDegC = [2]float64{z.req.AmbientDegC.Min, z.req.AmbientDegC.Max}[k>>1&1]
			p.Load.Current = [2]float64{z.req.LoadCurrent.Max, z.req.LoadCurrent.Min}[k&1]
			if !yield(p) {
				return
			}
		}
	}
}

// heldMargins returns by how much margins exceed what they are held to, as a part of
// it; -Inf where the loop is not stable.
func heldMargins(m *loop.Margins, status loop.Status, fs float64) float64 {
	if !status.OK() || m.Stability != loop.Stable {
		return math.Inf(-1)
	}
	reserve := math.Min(m.PhaseMargin/worstMargin-1, 1-m.Crossover/(worstCross*fs))
	if parts.Known(m.GainMargin) {
		reserve = math.Min(reserve, m.GainMargin/worstGain-1)
	}
	return reserve
}

const (
	mostRestless = 3     // [1] designs that keep their margins and do not settle: slower ones yet will not either
	settledBand  = 0.8   // [1] of the band of recovery, as a reserve
	settledAfter = 100.0 // [1] periods, where no recovery is asked for
)

// stepSettles reports whether the draft keeps the load step of the requirement at
// the corners where duty ratio and inductor current follow it worst. A loop that
// asks for more than they give can ring between its limits, however good its margins.
func (z *sizer) stepSettles() bool {
	demand, asked := transient.DemandOf(z.req)
	if !asked {
		return true
	}
	demand.Band *= settledBand
	e := evaluate.Prepare(z.draft)
	values := numbers(e.Stage())
	follower := transient.Follower{Demand: demand}
	p := stage.Point{SourceResistance: z.req.SourceResistance, AmbientDegC: z.req.AmbientDegC.Min, AgeRatio: 1, PartTemperatureDegC: parts.Unknown, Control: stage.Control{Kind: stage.ByFeedback}}
	for _, at := range [...]loopCorner{{small: true, large: true}, {small: true, lossy: true, large: true}} {
		for _, v := range z.ans.Spreads {
			*values[v.Field] = at.end(&v)
		}
		for _, fs := range [2]float64{z.fsHigh, z.fsLow} {
			e.Stage().SwitchingFrequency = fs
			for _, p.Input = range [2]float64{z.req.Input.Min, z.req.Input.Max} {
				for _, applied := range [2]bool{true, false} {
					if o, ok := follower.Follow(e, &p, applied); !ok || !(o.Recovery <= z.settled(fs)) || !z.pace.goesOn() {
						return false
					}
				}
			}
		}
	}
	return true
}

// settled returns the time allowed to come back from a load step [s].
func (z *sizer) settled(fs float64) float64 {
	if s := z.req.Targets.LoadStep; known(s.Recovery) {
		return s.Recovery
	}
	return settledAfter / fs
}

// loopCorner says where the spreads stand at a corner of the loop.
type loopCorner struct {
	age   float64 // [1]
	small bool    // the output capacitance
	lossy bool    // its series resistance is great
	large bool    // the inductance
}

var loopCorners = [...]loopCorner{{age: 1, small: true, lossy: true}, {age: 1, small: true}, {}}

// end returns the value of a spread at the corner.
func (c loopCorner) end(v *spread.Variable) float64 {
	var high bool
	switch output := strings.HasPrefix(v.Field, "output_capacitors/"); {
	case v.Field == "switching_frequency_hz":
	case v.Field == "inductor/inductance_h":
		high = c.large
	case output && strings.HasSuffix(v.Field, "capacitance_f"):
		high = !c.small
	case output && strings.HasSuffix(v.Field, "esr_ohm"):
		high = c.lossy
	default:
		return v.Typ
	}
	if high {
		return v.Max
	}
	return v.Min
}
