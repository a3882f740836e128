package exchange

import (
	"cmp"
	"context"
	"encoding/json"
	"fmt"
	"maps"
	"math"
	"slices"
	"strconv"

	"railproof/api/render"
	"railproof/api/wire"
	"railproof/calc/quantity"
	"railproof/service"
)

// A report calls other operations, so it joins them here.
func init() { computations["reports"] = report }

// allSections are what a report has unless it is asked for less.
var allSections = []string{"requirement", "stage", "sizing", "operating-figures", "losses", "worst-case", "loop", "transient", "findings", "cautions", "assumptions", "reproduction"}

// report answers the operations that its sections need, each from a request of its
// own, and puts the answers together.
func report(ctx context.Context, x *Exchange, tree any, head wire.Head) (any, error) {
	w, err := decode[wire.ReportsRequest](tree)
	if err != nil {
		return nil, err
	}
	setting, err := w.Decode()
	if err != nil {
		return nil, err
	}
	request := tree.(map[string]any)
	b := &binder{ctx: ctx, x: x, request: request, setting: setting, paths: map[string]string{}}
	for _, op := range x.contract.Operations() {
		b.paths[op.ID] = op.Path
	}
	b.report = &render.Report{
		Title: cmp.Or(w.Title, "Proof of "+cmp.Or(w.Requirement.Name, w.Stage.Name, "a rail")), Date: w.Date, Request: request, Engine: head.Engine, ResultID: head.ResultID,
		Sections: w.Sections, Control: controlWords(setting.Conditions.Control),
	}
	if w.Sections == nil {
		b.report.Sections = allSections
	}
	if err := b.bind(w); err != nil {
		return nil, err
	}
	return b.report, nil
}

// binder gathers the answers of a report.
type binder struct {
	ctx     context.Context
	x       *Exchange
	request map[string]any
	setting *wire.Setting
	paths   map[string]string
	report  *render.Report
	parts   []render.ReportPart
}

func (b *binder) wants(section string) bool { return slices.Contains(b.report.Sections, section) }

// part answers one operation.
func part[A any](b *binder, operation string, tree map[string]any) (answer A, err error) {
	r := b.report
	id := service.ResultID(operation, b.x.service.Engine(), tree)
	value, err := computations[operation](b.ctx, b.x, tree, wire.Head{Engine: r.Engine, ResultID: id})
	if err != nil {
		return answer, err
	}
	b.parts = append(b.parts, render.ReportPart{Method: "POST", Path: b.paths[operation], ResultID: id})
	return value.(A), nil
}

// bind answers what is quick beside the proofs, which have all cores most of the
// time; the parts are listed in a fixed order.
func (b *binder) bind(w *wire.ReportsRequest) error {
	proofs := *b
	proofs.parts = nil
	done := make(chan error, 1)
	go func() {
		defer func() {
			if failed := recover(); failed != nil { // nobody above this goroutine would
				done <- panicked(failed)
			}
		}()
		done <- proofs.proofs(w)
	}()
	err := b.singles()
	if failed := <-done; err == nil {
		err = failed
	}
	b.report.Parts = slices.Concat(b.parts, proofs.parts)
	return err
}

// singles answers what needs one core for a moment.
func (b *binder) singles() (err error) {
	r, stage := b.report, b.request["stage"]
	typical, heavy, points := b.points()
	if b.wants("sizing") {
		if r.Sizing, err = part[*wire.SizingAnswer](b, "sizing", map[string]any{"requirement": b.request["requirement"]}); err != nil {
			return err
		}
	}
	if b.wants("operating-figures") {
		if r.Steady, err = part[*wire.SteadyStateAnswer](b, "steadyState", map[string]any{"stage": stage, "point": typical, "waveform_points": drawnPoints["steadyState"]}); err != nil {
			return err
		}
	}
	if b.wants("losses") {
		if r.Losses, err = part[*wire.LossesAnswer](b, "losses", map[string]any{"stage": stage, "points": points}); err != nil {
			return err
		}
		if r.Grid, err = part[*wire.LossesAnswer](b, "losses", map[string]any{"stage": stage, "grid": b.grid(heavy), "quantities": []any{"efficiency_ratio"}}); err != nil {
			return err
		}
	}
	return b.dynamics(typical, points)
}

// proofs answers worst case and rules.
func (b *binder) proofs(w *wire.ReportsRequest) (err error) {
	r := b.report
	if b.wants("worst-case") {
		if r.Corners, err = part[*wire.CornersAnswer](b, "corners", b.corners(w)); err != nil {
			return err
		}
	}
	if b.wants("findings") {
		if r.Rules, err = part[*wire.RuleChecksAnswer](b, "ruleChecks", b.shared("stage", "requirement", "conditions", "limits", "packs", "waivers", "date")); err != nil {
			return err
		}
	}
	return nil
}

// dynamics answers how the loop behaves, where the stage has one, and how the output
// answers the load step of the requirement.
func (b *binder) dynamics(typical map[string]any, points []any) (err error) {
	r, stage := b.report, b.request["stage"]
	if !b.setting.HasLoop {
		return nil
	}
	if b.wants("loop") {
		if r.Loop, err = part[*wire.LoopGainAnswer](b, "loopGain", map[string]any{"stage": stage, "points": points}); err != nil {
			return err
		}
	}
	step := b.setting.LoadStep
	if !b.wants("transient") || step == nil || !(step.Step > 0) {
		return nil
	}
	most := b.setting.Conditions.Load.Current.Max
	least := max(most-step.Step, 0)
	for _, ends := range [2][2]float64{{least, most}, {most, least}} {
		from := maps.Clone(typical)
		from["load"] = map[string]any{"current_a": ends[0]}
		change := map[string]any{"to_a": ends[1]}
		if step.Slew != nil {
			change["slew_a_per_s"] = *step.Slew
		}
		tree := map[string]any{"stage": stage, "point": from, "event": map[string]any{"load_step": change}, "waveform_points": drawnPoints["transients"]}
		if shown := b.shown(step); shown > 0 {
			tree["duration_s"] = shown
		}
		a, err := part[*wire.TransientsAnswer](b, "transients", tree)
		if err != nil {
			return err
		}
		r.Transients = append(r.Transients, a)
	}
	return nil
}

// shownRecoveries is how much of the time after a load step is shown, over the time
// in which the output is to recover.
const shownRecoveries = 2.5 // [1]

// shown returns the time after a load step that the report follows, rounded; 0: the
// default, where no time of recovery is asked for or it is no time of a loop.
func (b *binder) shown(step *wire.LoadStep) float64 {
	if step.Recovery == nil {
		return 0
	}
	periods := shownRecoveries * *step.Recovery / b.setting.Period
	if !(periods >= 20 && periods <= 2000) {
		return 0
	}
	return short(shownRecoveries * *step.Recovery)
}

// short returns the nearest number with three digits.
func short(v float64) float64 {
	rounded, err := strconv.ParseFloat(strconv.FormatFloat(v, 'g', 3, 64), 64)
	if err != nil {
		panic("exchange: a number that cannot be read back")
	}
	return rounded
}

// shared takes members of the report's request over.
func (b *binder) shared(names ...string) map[string]any {
	tree := map[string]any{}
	for _, name := range names {
		if v, given := b.request[name]; given {
			tree[name] = v
		}
	}
	return tree
}

// corners is the request for the worst case: the limits that it knows, without
// those on load steps, which rules check.
func (b *binder) corners(w *wire.ReportsRequest) map[string]any {
	tree := b.shared("stage", "samples", "seed")
	tree["conditions"] = treeOf(b.setting.Conditions)
	if given, is := b.request["conditions"]; is {
		tree["conditions"] = given
	}
	var limits []any
	for i, l := range w.Limits {
		id, found := quantity.ByKey(l.Quantity)
		if info, _ := quantity.Of(id); found && info.Group == quantity.Transient {
			continue
		}
		limits = append(limits, b.request["limits"].([]any)[i])
	}
	if limits != nil {
		tree["limits"] = limits
	}
	return tree
}

// points are the typical point, the hot one at full load, and those with a few
// between that losses are shown at.
func (b *binder) points() (typical, heavy map[string]any, list []any) {
	c := b.setting.Conditions
	load := c.Load.Current
	at := func(input, current, ambient float64) map[string]any {
		p := map[string]any{"input_v": input, "load": map[string]any{"current_a": current}, "ambient_degc": ambient, "control": treeOf(c.Control)}
		if c.Source != nil {
			p["source_ohm"] = *c.Source
		}
		return p
	}
	typical = at(*c.Input.Typ, *load.Typ, *c.Ambient.Typ)
	heavy = at(*c.Input.Typ, load.Max, c.Ambient.Max)
	list = []any{typical, at(*c.Input.Typ, load.Min, *c.Ambient.Typ), at(c.Input.Min, load.Max, c.Ambient.Max), heavy, at(c.Input.Max, load.Max, c.Ambient.Max)}
	return typical, heavy, list
}

const gridLoads = 12

// grid spans input voltage and load at the greatest ambient temperature.
func (b *binder) grid(heavy map[string]any) map[string]any {
	c := b.setting.Conditions
	least, most := max(c.Load.Current.Min, c.Load.Current.Max/100), c.Load.Current.Max
	var loads []any
	for i := range gridLoads {
		loads = append(loads, short(least*math.Pow(most/least, float64(i)/(gridLoads-1))))
	}
	inputs := []any{c.Input.Min}
	for _, v := range []float64{*c.Input.Typ, c.Input.Max} {
		if v > inputs[len(inputs)-1].(float64) {
			inputs = append(inputs, v)
		}
	}
	tree := map[string]any{"input_v": inputs, "load_current_a": loads, "ambient_degc": []any{c.Ambient.Max}, "control": heavy["control"]}
	if s, given := heavy["source_ohm"]; given {
		tree["source_ohm"] = s
	}
	return tree
}

// treeOf writes a value of the contract as a document's tree.
func treeOf(v any) any {
	text, err := json.Marshal(v)
	var tree any
	if err == nil {
		err = json.Unmarshal(text, &tree)
	}
	if err != nil {
		panic(fmt.Sprintf("exchange: %T cannot be written: %v", v, err))
	}
	return tree
}

func controlWords(c *wire.Control) string {
	switch {
	case c == nil || c.RegulateBy != "":
		return "regulated by the stage's own feedback"
	case c.RegulateTo != nil:
		return "regulated to " + render.Figure3(*c.RegulateTo, "V")
	}
	return "at a fixed duty ratio"
}
