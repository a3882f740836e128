package service

import (
	"context"
	"math"
	"math/cmplx"

	"railproof/calc/caution"
	"railproof/calc/evaluate"
	"railproof/calc/loop"
	"railproof/calc/parts"
	"railproof/calc/stage"
)

// LoopRequest asks for the control loop of a stage at a list of points.
type LoopRequest struct {
	Design      Design
	Places      []Place
	Target      *loop.Target // what the compensator is designed for, at the first point; nil: it is given
	Filter      *loop.Source // input filter; nil: none
	Frequencies []float64    // [Hz] of the curves, rising
}

// LoopAnswer holds the loop at each point, in their order.
type LoopAnswer struct {
	Status LoopStatus   // the worst of all
	Design *loop.Design // of the compensator; nil where it was given
	Items  []*LoopItem
	Basis  Basis
}

// LoopItem is the loop at one point.
type LoopItem struct {
	Outcome     *Outcome
	Status      LoopStatus
	Analysis    loop.Status
	Margins     loop.Margins
	DirectError float64 // [1] by which the mean output is too low for want of direct gain
	Bode        []loop.Bode
	Network     []complex128 // [1] gain of the compensator, an entry per frequency
	Impedance   Peak         // closed-loop output impedance; NaN for an unstable loop
	Agreement   loop.Agreement
	Deviation   []loop.Bode // both models at a few frequencies
	Current     *loop.CurrentLoop
	Slope       float64 // [V/s] slope compensation given; in peak current mode only
	Source      *SourceItem
	Remarks     []loop.Remark
	Detail      string
}

// Peak is the greatest value of a curve.
type Peak struct {
	Value float64 // [any]
	At    float64 // [Hz]
}

// SourceItem is what source and loop do to each other.
type SourceItem struct {
	Analysis loop.Status
	Loop     loop.Margins // exact, with the source
	Separate loop.SourceMargin
	Curve    []loop.Interaction // an entry per frequency
}

// LoopStatus tells how a stage and its loop do: that of the evaluation where it
// does not regulate, else that of the loop.
type LoopStatus struct {
	Stage      evaluate.Status
	Unstable   bool
	NoCompare  bool // the comparator has no clean crossing
	Unanalysed bool // no model could be set up
}

// String returns the status as it stands on the wire.
func (s LoopStatus) String() string {
	switch {
	case s.Stage != evaluate.OK && s.Stage != evaluate.OverTemperature:
		return s.Stage.String()
	case s.Unanalysed:
		return evaluate.NotConverged.String()
	case s.NoCompare:
		return "no-comparison"
	case s.Unstable:
		return "unstable"
	}
	return s.Stage.String()
}

func (s LoopStatus) severity() int {
	switch {
	case s.Stage != evaluate.OK && s.Stage != evaluate.OverTemperature:
		return 10 + severity(s.Stage)
	case s.Unanalysed:
		return 4
	case s.NoCompare:
		return 3
	case s.Unstable:
		return 2
	}
	return severity(s.Stage)
}

// Loop analyses the loop at each point. The error is a *stage.InvalidError whose
// fields are those of the stage, of the target or of the source, or an
// *UnreachableTarget.
func (s *Service) Loop(ctx context.Context, r *LoopRequest) (*LoopAnswer, error) {
	kind := interactive
	if len(r.Places) > loopsAtOnce {
		kind = bulk
	}
	a := &LoopAnswer{Items: make([]*LoopItem, len(r.Places))}
	err := s.run(ctx, kind, func() error {
		d := r.Design
		if r.Target != nil {
			if err := s.design(ctx, r, &d, a); err != nil {
				return err
			}
		}
		failed := make([]error, len(r.Places))
		err := inChunks(ctx, s.turns(kind), len(r.Places), 1, s.workers,
			func() *loopBench { return &loopBench{evaluator: s.evaluator(d.Stage)} }, func(b *loopBench) { s.release(b.evaluator) },
			func(b *loopBench, i, _ int) { a.Items[i], failed[i] = b.item(r, &r.Places[i].Point) })
		for _, e := range failed {
			if err == nil {
				err = e
			}
		}
		if err != nil {
			return err
		}
		outcomes := make([]*Outcome, len(a.Items))
		for i, x := range a.Items {
			outcomes[i] = x.Outcome
			if i == 0 || x.Status.severity() > a.Status.severity() {
				a.Status = x.Status
			}
			s.done.count(x.Outcome.Status)
		}
		e := s.evaluator(d.Stage)
		defer s.release(e)
		a.Basis = s.rests(&d, e, r.Places, outcomes, caution.Seen{})
		return nil
	})
	if err != nil {
		return nil, err
	}
	return a, nil
}

// loopsAtOnce is the number of points that still count as short work: about 20 ms.
const loopsAtOnce = 8 // [1]

// loopBench is the workspace of one worker.
type loopBench struct {
	evaluator *evaluate.Evaluator
	plant     loop.Plant
	sampled   loop.Sampled
	averaged  loop.Averaged
	sourced   loop.Sampled
}

// item analyses the loop at one point.
func (b *loopBench) item(r *LoopRequest, p *stage.Point) (*LoopItem, error) {
	at := *p
	if r.Filter != nil {
		at.SourceResistance += r.Filter.Resistance
	}
	e := b.evaluator
	x := &LoopItem{Outcome: outcome(e, &at), DirectError: parts.Unknown, Impedance: Peak{parts.Unknown, parts.Unknown}, Analysis: loop.NotRegulating}
	x.Status.Stage, x.Detail = x.Outcome.Status, x.Outcome.Detail
	var again evaluate.Result
	e.Eval(&at, &again)
	if !b.plant.Bind(e, x.Outcome.Status) {
		return x, nil
	}
	if err := b.plant.Check(); err != nil {
		return nil, err
	}
	x.Analysis = b.sampled.Set(&b.plant)
	if !b.sampled.Holds() {
		x.Analysis, x.Status.Stage = loop.NotRegulating, evaluate.NoOperatingPoint
		if b.sampled.Limited() {
			x.Detail = limitedDetail(&b.plant, b.sampled.Peak)
			return x, nil
		}
		x.Detail = "for want of the amplifier's direct gain the loop leaves the output " + short(100*math.Abs(b.sampled.Error)) + " % off what the divider sets: it has no margins at this point; give it more open_loop_gain_ratio, or more transconductance_s and output_ohm"
		return x, nil
	}
	if x.Analysis.OK() {
		b.sampled.Margins(&x.Margins)
		x.Analysis = x.Margins.Status
	}
	switch {
	case x.Analysis == loop.NoComparison:
		x.Status.NoCompare = true
		x.Detail = "the control voltage's own ripple rises faster than the ramp that it is compared with: less gain at the switching frequency, or more ramp, is needed"
		return x, nil
	case !x.Analysis.OK():
		x.Status.Unanalysed = true
		x.Detail = "the loop's equations could not be solved: " + analysisWords[x.Analysis]
		return x, nil
	}
	b.averaged.Set(&b.plant)
	b.fill(r, x)
	return x, b.source(r, &at, x)
}

// limitedDetail tells why a loop whose pulses the current limit ends has no margins.
func limitedDetail(p *loop.Plant, peak float64) string {
	d := "the inductor current reaches " + short(peak) + " A as the comparator decides, not below the current limit of " + short(p.Modulator.CurrentLimit) + " A: the limit ends the pulses, and the loop has no margins at this point"
	if p.Circuit.Legs != nil && p.Modulator.Mode == parts.VoltageMode {
		d += "; in voltage mode nothing makes unequal phases share the current"
	}
	return d
}

var analysisWords = map[loop.Status]string{
	loop.SingularPoint: "they have no unique periodic solution",
	loop.TooStiff:      "a time constant is too short against the switching period",
	loop.NotConverged:  "no periodic operation with one pulse of each phase in every period was found, or its eigenvalues did not settle",
}

// fill takes everything from the models.
func (b *loopBench) fill(r *LoopRequest, x *LoopItem) {
	p := &b.plant
	x.Status.Unstable = x.Margins.Stability != loop.Stable
	x.DirectError = b.sampled.Error
	x.Bode = make([]loop.Bode, len(r.Frequencies))
	b.sampled.Sweep(&b.averaged, r.Frequencies, x.Bode)
	x.Network = make([]complex128, len(r.Frequencies))
	for i, f := range r.Frequencies {
		x.Network[i] = loop.CompensatorGain(&p.Compensator, &p.Feedback, f)
	}
	if !x.Status.Unstable {
		x.Impedance = b.peak(x.Bode)
	}
	x.Agreement = b.sampled.Agreement(&b.averaged)
	shares := agreementShares()
	x.Deviation = make([]loop.Bode, len(shares))
	for i := range shares {
		shares[i] *= b.evaluator.Stage().SwitchingFrequency
	}
	b.sampled.Sweep(&b.averaged, shares, x.Deviation)
	if p.Modulator.Mode == parts.PeakCurrentMode {
		c := p.CurrentLoop()
		x.Current, x.Slope = &c, p.Modulator.Slope
	}
	x.Remarks = b.sampled.Remarks(&b.averaged, &x.Margins)
	if x.Status.Unstable && len(x.Remarks) > 0 {
		x.Detail = x.Remarks[0].Detail
	}
}

// agreementShares are the frequencies at which the models are compared, over the
// switching frequency.
func agreementShares() []float64 {
	return []float64{1e-3, 3e-3, 1e-2, 2e-2, 5e-2, 0.1, 0.15, 0.2, 0.25, 0.3, 0.35, 0.4, 0.45}
}

const peakSteps = 30 // [1] golden sections: 1e-6 of the distance of two frequencies

// peak refines the greatest closed-loop output impedance of the sweep between its
// neighbours.
func (b *loopBench) peak(list []loop.Bode) Peak {
	at, most := 0, 0.0
	for i := range list {
		if z := cmplx.Abs(list[i].Sampled.ClosedImpedance); z > most {
			at, most = i, z
		}
	}
	p := Peak{most, list[at].Frequency}
	lo, hi := list[max(0, at-1)].Frequency, list[min(len(list)-1, at+1)].Frequency
	const golden = 0.6180339887498949
	z := func(f float64) float64 { return cmplx.Abs(b.sampled.At(f).ClosedImpedance) }
	left, right := hi-golden*(hi-lo), lo+golden*(hi-lo)
	zl, zr := z(left), z(right)
	for range peakSteps {
		if zl > zr {
			hi, right, zr = right, left, zl
			left = hi - golden*(hi-lo)
			zl = z(left)
		} else {
			lo, left, zl = left, right, zr
			right = lo + golden*(hi-lo)
			zr = z(right)
		}
	}
	if m := math.Max(zl, zr); m > p.Value {
		p = Peak{m, (lo + hi) / 2}
	}
	return p
}
