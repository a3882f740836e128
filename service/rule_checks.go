package service

import (
	"context"
	"slices"

	"railproof/calc/caution"
	"railproof/calc/evaluate"
	"railproof/calc/quantity"
	"railproof/calc/rules"
	"railproof/calc/stage"
	"railproof/service/packs"
)

// Proof is a stage with what it must do and the rules it must keep to.
type Proof struct {
	Design        Design
	At            string // pointer of the conditions, or of the requirement that they are taken from
	Conditions    stage.Conditions
	RequirementAt string // pointer of the requirement: "/requirement"
	Requirement   stage.Requirement
	Presumed      []stage.Assumed // defaults of the requirement, by its field ids
	LimitsAt      string          // pointer of the limits: "/limits"
	Limits        []rules.Limit
	Packs         []packs.Entry
	Waivers       []rules.Waiver
	Date          rules.Date // with which waivers are compared
	Further       []quantity.ID
	packs         []*rules.Pack
	requireAlike  []rules.Limit // of the requirement, whose quantities are wanted too
}

// RuleChecksAnswer is the outcome of a check.
type RuleChecksAnswer struct {
	Report   rules.Report
	Corners  []WorstCorner // that findings refer to
	Basis    Basis
	Complete bool // every evaluation had an answer
}

// ConditionsOf returns the conditions that a requirement asks for: its ranges, from
// new to the end of life. The output is held by the stage's feedback or, without
// one, at the voltage asked for.
func ConditionsOf(r *stage.Requirement, s *stage.Stage) stage.Conditions {
	c := stage.Conditions{Input: r.Input, SourceResistance: r.SourceResistance, LoadCurrent: r.LoadCurrent, AmbientDegC: r.AmbientDegC, AgeRatio: stage.Range{Max: 1}}
	c.Control = stage.Control{Kind: stage.RegulateTo, Voltage: r.Output}
	if s.Feedback.Present {
		c.Control = stage.Control{Kind: stage.ByFeedback}
	}
	return c
}

// prepare gathers the rules: those of the packs and the limits of the request.
func (p *Proof) prepare() {
	p.packs = compiled(p.Packs)
	if len(p.Limits) > 0 {
		p.packs = append(p.packs, rules.LimitRules(p.LimitsAt, p.Limits))
	}
}

// request asks for what the rules want to know of a design in the proof's place.
func (p *Proof) request(d *Design) *worstRequest {
	bare := rules.Case{StageAt: d.At, Stage: d.Stage, Spreads: d.Variables, Assumed: d.Assumed, Requirement: &p.Requirement}
	demand := rules.Needs(&bare, p.packs)
	for i := range p.requireAlike {
		l := &p.requireAlike[i]
		if Inapplicable(d.Stage, &p.Conditions.Control, l.Quantity) != "" {
			continue
		}
		if l.Min == l.Min {
			demand.Least = append(demand.Least, l.Quantity)
		}
		if l.Max == l.Max {
			demand.Greatest = append(demand.Greatest, l.Quantity)
		}
	}
	for _, id := range p.Further {
		demand.Least, demand.Greatest = append(demand.Least, id), append(demand.Greatest, id)
	}
	for _, list := range []*[]quantity.ID{&demand.Least, &demand.Greatest} {
		slices.Sort(*list)
		*list = slices.Compact(*list)
	}
	if p.requireAlike != nil { // a comparison wants both ends of what it compares
		demand.Nominal = slices.Concat(demand.Nominal, demand.Least, demand.Greatest)
	}
	return &worstRequest{design: d, at: p.At, conditions: p.Conditions, requirementAt: p.RequirementAt, requirement: &p.Requirement, demand: demand}
}

// RuleChecks judges a stage by rules on its worst values.
func (s *Service) RuleChecks(ctx context.Context, p *Proof) (*RuleChecksAnswer, error) {
	p.prepare()
	var a *RuleChecksAnswer
	err := s.run(ctx, bulk, func() error {
		w, err := s.worst(ctx, p.request(&p.Design), s.workers)
		if err != nil {
			return err
		}
		a = &RuleChecksAnswer{Report: rules.Check(&w.Case, p.packs, p.Waivers, p.Date), Corners: w.Corners, Basis: s.proofRests(p, w), Complete: w.complete()}
		return nil
	})
	return a, err
}

// proofRests gathers what a proof rests on.
func (s *Service) proofRests(p *Proof, w *worstCase) Basis {
	d := &p.Design
	var warn warnings
	warn.unused(d)
	point := p.Conditions.Typical()
	warn.scale(d, &point, &w.Nominal)
	if p.Conditions.Control.Kind == stage.RegulateTo {
		warn.add("tolerance-hidden", p.At, "the output is held at %s V exactly: tolerances of reference and divider are left out; give the stage its feedback to have them in", p.Conditions.Control.Voltage)
	}
	if len(d.Variables) == 0 {
		warn.keep(Warning{"no-spreads", d.At, "no number of the stage has a tolerance: only conditions are varied"})
	}
	e := s.evaluator(d.Stage)
	defer s.release(e)
	var base *basis
	if w.Nominal.Status.Figures() {
		base = &basis{&point, &w.Nominal}
	}
	list := s.assumptions(d, e, base)
	for _, f := range p.Presumed {
		list = append(list, Assumption{Pointer: p.RequirementAt + "/" + f.Field, Value: finite(f.Value), Low: finite(f.Low), High: finite(f.High), Why: f.Why})
	}
	return Basis{list, caution.Of(d.Stage, d.At, d.Variables, &w.seen), warn.list}
}

// worstStatus returns the gravest status that was met.
func (w *worstCase) worstStatus() evaluate.Status {
	worst := w.Nominal.Status
	for _, p := range w.Statuses {
		worst = worse(worst, p.Status)
	}
	return worst
}
