package service

import (
	"railproof/calc/loop"
	"railproof/calc/stage"
)

// source adds what source and loop do to each other, where the point has a source
// resistance with input banks behind it, or the request a filter.
func (b *loopBench) source(r *LoopRequest, p *stage.Point, x *LoopItem) error {
	e := b.evaluator
	banks := len(e.InputBanks())
	if r.Filter == nil && (p.SourceResistance == 0 || banks == 0) {
		return nil
	}
	var source loop.Source
	if r.Filter != nil {
		source = *r.Filter
	}
	// The point's resistance holds the filter's already.
	source.Resistance = p.SourceResistance + e.Stage().Board.InputPath
	q := b.plant
	q.Behind(e, source)
	// Behind a source the bridge's mean voltage follows from the source's own.
	bridge := q.Circuit.Vin
	q.Circuit.Vin = p.Input
	q.Modulator.FeedForwardAt *= p.Input / bridge
	if err := q.Check(); err != nil {
		return err
	}
	s := &SourceItem{Separate: b.averaged.SourceMargins(&q.Source), Curve: make([]loop.Interaction, len(r.Frequencies))}
	for i, f := range r.Frequencies {
		s.Curve[i] = b.averaged.InteractionAt(&q.Source, f)
	}
	if s.Analysis = b.sourced.Set(&q); s.Analysis.OK() {
		b.sourced.Margins(&s.Loop)
		s.Analysis = s.Loop.Status
	}
	x.Source = s
	x.Status.Unanalysed = !s.Analysis.OK()
	if x.Status.Unanalysed {
		x.Detail = "the loop behind its source could not be analysed"
	}
	x.Status.Unstable = x.Status.Unstable || s.Analysis.OK() && s.Loop.Stability != loop.Stable
	if x.Detail == "" && x.Status.Unstable {
		x.Detail = "stable from a stiff source, but not behind this one"
	}
	return nil
}
