package sizing

import (
	"math"

	"railproof/calc/parts"
	"railproof/calc/stage"
)

// sizer carries one requirement at one switching frequency through the steps of
// sizing. Each step reads what the ones before it have set, and either adds to the
// answer or to its conflicts.
type sizer struct {
	req    *stage.Requirement
	choice Choices
	want   stage.Targets // with the defaults of what was left open
	phases float64       // [1]
	try    trial
	pace   *pace
	share  float64 // [1] crossover that the output bank is sized for, over the switching frequency

	fs, fsLow, fsHigh float64        // [Hz]
	ripple            float64        // [V] output ripple that the draft keeps
	lossShare         float64        // [1] loss allowed over output power
	junction          float64        // [degC] greatest allowed
	source            float64        // [ohm] of source and input path
	voLow, voHigh     float64        // [V] ends of the regulated output
	drops             Drops          // greatest, hot
	dutyMost          float64        // [1] that the controller reaches
	leastL            parts.Inductor // draft inductor at its least inductance
	mostL             float64        // [H] greatest inductance of one phase
	rippleMost        float64        // [A] greatest ripple of one phase

	grade         accuracy
	windingBudget float64 // [ohm] typical at 25 degC
	leastDrops    Drops   // cold, but the diode's threshold, which is least when hot
	shortestOn    float64 // [s]
	rated         float64 // [H] rated inductance of the part chosen
	saturationAt  float64 // [A] saturation rating of the part chosen
	peakMost      float64 // [A] greatest inductor current of one phase
	inductorRMS   float64 // [A] greatest, one phase
	inputRMS      float64 // [A] greatest
	crossover     float64 // [Hz] of the draft's loop
	phaseMargin   float64 // [deg]
	settles       bool    // the draft's loop settles after the load step, with its margins kept
	inputCorner   corner  // where

	draft  *stage.Stage
	judged judgement
	ans    Answer
}

// trial is one way of drawing up a draft.
type trial struct {
	effort     float64 // [1] resistances over those of the loss budget
	inductance float64 // [1] over the least that the window allows
}

// newSizer fills in the targets' defaults and what follows from the requirement
// alone.
func newSizer(req *stage.Requirement, choice Choices, fs float64, try trial, p *pace) *sizer {
	z := &sizer{req: req, choice: choice.withDefaults(req.Output), want: req.Targets, phases: float64(req.PhaseCount), try: try, pace: p, share: crossoverRatio, fs: fs}
	z.fsLow, z.fsHigh = fs*(1-frequencyTol), fs*(1+frequencyTol)
	z.ans.Frequency = fs
	z.defaults()
	z.dutyMost = min(z.choice.MaxDutyRatio, 1-z.fsHigh*z.choice.MinOffTime)
	return z
}

// defaults fills in the targets that every stage needs.
func (z *sizer) defaults() {
	w := &z.want
	fill := func(field string, v *float64, value, low, high float64, why string) {
		if !known(*v) {
			*v = value
			z.assume(field, value, low, high, why)
		}
	}
	fill("targets/inductor_ripple_ratio", &w.InductorRippleRatio, 0.3, 0.2, 0.5, "ripple target not given: three tenths of the greatest load current")
	fill("targets/output_ripple_pp_v", &w.OutputRipple, 0.01*z.req.Output, 0.003*z.req.Output, 0.02*z.req.Output, "ripple target not given: one per cent of the output voltage")
	fill("targets/input_ripple_pp_v", &w.InputRipple, 0.02*z.req.Input.Min, 0.005*z.req.Input.Min, 0.05*z.req.Input.Min, "ripple target not given: two per cent of the least input voltage")
	fill("targets/junction_degc", &w.JunctionDegC, hotDegC, 100, 150, "greatest junction temperature not given")
	z.junction = w.JunctionDegC
	// A stage with less ripple than allowed may still keep a tight deviation.
	z.ripple = w.OutputRipple
	if s := w.LoadStep; known(s.Step) && known(s.Deviation) {
		z.ripple = math.Min(z.ripple, s.Deviation)
	}
	if known(w.Efficiency) && w.Efficiency < 1 {
		z.lossShare = 1/w.Efficiency - 1
		return
	}
	// A stage loses a share of the power and a drop that weighs more at low output.
	e := math.Min(0.95, math.Max(0.7, 0.95-0.25/z.req.Output))
	z.lossShare = 1/e - 1
	z.assume("targets/efficiency_ratio", e, 0.7, 0.97, "efficiency target not given: resistances of the draft are budgeted for this")
}

// assume tells what stood in for a field; a later word replaces an earlier one.
func (z *sizer) assume(field string, value, low, high float64, why string) {
	for i := range z.ans.Assumed {
		if z.ans.Assumed[i].Field == field {
			z.ans.Assumed[i] = stage.Assumed{Field: field, Value: value, Low: low, High: high, Why: why}
			return
		}
	}
	z.ans.Assumed = append(z.ans.Assumed, stage.Assumed{Field: field, Value: value, Low: low, High: high, Why: why})
}

func (z *sizer) note(code, field, detail string) {
	z.ans.Notes = append(z.ans.Notes, Note{Code: code, Field: field, Detail: detail})
}

// conflict records that the requirement cannot be met.
func (z *sizer) conflict(constraint string, needed, available float64, unit, detail string, fields ...string) {
	z.ans.Conflicts = append(z.ans.Conflicts, Conflict{Fields: fields, Constraint: constraint, Needed: needed, Available: available, Unit: unit, Detail: detail})
}

// hopeless reports whether a conflict was found that other resistances do not mend.
func (z *sizer) hopeless() bool {
	for _, c := range z.ans.Conflicts {
		switch c.Constraint {
		case "greatest-duty", "least-on-time", "source-power", "output-tolerance", "hold-up", "inductance":
		default:
			return true
		}
	}
	return false
}

// failed reports whether a conflict was found.
func (z *sizer) failed() bool { return len(z.ans.Conflicts) > 0 }
